#!/bin/sh
# Outlives the script that started it, even one killed hard, and ends what that one would leave behind.
# Reads lines that say what there is; "done" means that the script closed in order itself.
#   group <pid>      a process group; ended <pid> follows: its number may be another's by then
#   cluster <path>   a data folder on which PostgreSQL is about to start; postgres <pid> follows when it runs
#   folder <path>    to be removed
#   lock <path>      file that names the script as long as no other one took its place
script=$PPID
groups=''
cluster=''
postgres=''
folder=''
lock=''
while IFS=' ' read -r what value; do
  case "$what" in
    group) groups="$groups $value" ;;
    ended)
      rest=''
      for group in $groups; do [ "$group" = "$value" ] || rest="$rest $group"; done
      groups="$rest"
      ;;
    cluster) cluster="$value" ;;
    postgres) postgres="$value" ;;
    folder) folder="$value" ;;
    lock) lock="$value" ;;
    done) exit 0 ;;
  esac
done

# With -s: the shell's own kill takes "-TERM -- -123" for a wrong option.
tell_groups() {
  left=''
  for group in $groups; do
    if kill -s "$1" -- "-$group" 2>/dev/null; then left="$left $group"; fi
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

still_ours() {
  [ -z "$lock" ] || grep -q "\"pid\":$script[,}]" "$lock" 2>/dev/null
}
# Killed while PostgreSQL was starting: its number is not told yet. A later start of Fanlight sees to it itself.
tries=0
while [ -n "$cluster" ] && [ -z "$postgres" ] && [ "$tries" -lt 30 ] && still_ours; do
  postgres=$(head -n 1 "$cluster/postmaster.pid" 2>/dev/null)
  [ -n "$postgres" ] || sleep 0.1
  tries=$((tries + 1))
done

# That very process, not whoever runs on the data folder by now. Where the folder goes with it, the data are not needed.
if [ -n "$postgres" ]; then
  if [ -n "$folder" ]; then kill -s QUIT "$postgres" 2>/dev/null; else kill -s INT "$postgres" 2>/dev/null; fi
fi
# Ended, too, is one that nobody has fetched yet.
postgres_ended() {
  [ -z "$postgres" ] || ! kill -s 0 "$postgres" 2>/dev/null || grep -q '^State:.*Z' "/proc/$postgres/status" 2>/dev/null
}
tries=0
while [ -n "$folder" ] && [ "$tries" -lt 50 ]; do
  if postgres_ended; then
    rm -rf -- "$folder" 2>/dev/null
    [ -e "$folder" ] || break
  fi
  sleep 0.2
  tries=$((tries + 1))
done
exit 0
