#!/bin/sh
# Outlives the script that started it, even one killed hard, and ends what that one would leave behind.
# Reads lines "group <pid>", "postgres <pid>", "folder <path>"; "done" means that the script closed in order itself.
groups=''
postgres=''
folder=''
while IFS=' ' read -r what value; do
  case "$what" in
    group) groups="$groups $value" ;;
    postgres) postgres="$value" ;;
    folder) folder="$value" ;;
    done) exit 0 ;;
  esac
done

tell_groups() {
  left=''
  for group in $groups; do
    if kill -"$1" -- "-$group" 2>/dev/null; then left="$left $group"; fi
  done
}
tell_groups TERM
tries=0
while [ -n "$left" ] && [ "$tries" -lt 50 ]; do
  sleep 0.1
  tell_groups 0
  tries=$((tries + 1))
done
tell_groups KILL

# That very process, not whoever runs on the data folder by now. Where the folder goes with it, the data are not needed.
if [ -n "$postgres" ]; then
  if [ -n "$folder" ]; then kill -QUIT "$postgres" 2>/dev/null; else kill -INT "$postgres" 2>/dev/null; fi
fi
tries=0
while [ -n "$folder" ] && [ "$tries" -lt 50 ]; do
  if [ -z "$postgres" ] || ! kill -0 "$postgres" 2>/dev/null; then
    rm -rf -- "$folder" 2>/dev/null
    [ -e "$folder" ] || break
  fi
  sleep 0.2
  tries=$((tries + 1))
done
exit 0
