import { spawnSync } from 'node:child_process'
import { accessSync, constants, existsSync, readFileSync, readdirSync } from 'node:fs'
import { join } from 'node:path'

/** Oldest PostgreSQL whose features the schema uses. */
const versionMin = 15

/**
 * Finds the folder with initdb, pg_ctl and postgres: Debian's, newest first, then the PATH.
 *
 * @returns {string | null}
 */
export function findPostgresPrograms() {
  const folders = []
  const debian = '/usr/lib/postgresql'
  if (existsSync(debian)) {
    const versions = readdirSync(debian).filter(name => Number(name) >= versionMin).sort((a, b) => Number(b) - Number(a))
    folders.push(...versions.map(version => join(debian, version, 'bin')))
  }
  folders.push(...(process.env.PATH ?? '').split(':').filter(folder => folder !== ''))
  return folders.find(folder => ['initdb', 'pg_ctl', 'postgres'].every(name => isExecutable(join(folder, name)))) ?? null
}

function isExecutable(path) {
  try {
    accessSync(path, constants.X_OK)
    return true
  } catch {
    return false
  }
}

/**
 * The account that runs PostgreSQL's programs, which refuse to run as root.
 *
 * @returns {{ uid: number, gid: number } | null} null where the present user will do
 */
export function unprivilegedAccount() {
  if (process.getuid?.() !== 0) return null
  const lines = readFileSync('/etc/passwd', 'utf8').split('\n').map(line => line.split(':'))
  const line = lines.find(([name]) => name === 'postgres') ?? lines.find(([name]) => name === 'nobody')
  if (line === undefined) throw new Error('PostgreSQL does not run as root, and this machine has neither a postgres nor a nobody account.')
  return { uid: Number(line[2]), gid: Number(line[3]) }
}

/**
 * Runs one of PostgreSQL's programs to its end as the unprivileged account.
 *
 * @param {string} program full path
 * @param {readonly string[]} parameters
 * @param {{ quiet?: boolean }} [options] quiet: no output is read (a daemon would keep the pipe open)
 */
export function runProgram(program, parameters, options = {}) {
  const account = unprivilegedAccount()
  const [command, given] = account === null
    ? [program, parameters]
    : ['setpriv', [`--reuid=${account.uid}`, `--regid=${account.gid}`, '--clear-groups', '--', program, ...parameters]]
  // The account may not enter the folder we stand in.
  const result = spawnSync(command, given, {
    cwd: '/',
    env: { PATH: process.env.PATH, LANG: 'C.UTF-8', LC_ALL: 'C.UTF-8' },
    stdio: options.quiet === true ? 'ignore' : ['ignore', 'pipe', 'pipe'],
    encoding: 'utf8',
  })
  if (result.error !== undefined) throw result.error
  return { status: result.status ?? 1, output: `${result.stdout ?? ''}${result.stderr ?? ''}`.trim() }
}
