import { spawn } from 'node:child_process'
import { join } from 'node:path'

/**
 * A small process that ends what we leave behind should we be killed hard: it notices by the end of its input.
 *
 * @returns {{ tell: (what: 'group' | 'ended' | 'cluster' | 'postgres' | 'folder' | 'lock', value: string | number) => void, dismiss: () => void }}
 */
export function startKeeper() {
  // A session of its own: the Ctrl-C and the closing of the terminal that we answer to do not reach it.
  const child = spawn('/bin/sh', [join(import.meta.dirname, 'keeper.sh')], { cwd: '/', stdio: ['pipe', 'ignore', 'ignore'], detached: true })
  // Without it everything works as long as nobody kills us hard.
  child.once('error', () => {})
  child.stdin.on('error', () => {})
  child.unref()
  child.stdin.unref?.()
  return {
    tell: (what, value) => child.stdin.write(`${what} ${value}\n`),
    dismiss: () => child.stdin.end('done\n'),
  }
}
