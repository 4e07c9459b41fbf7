import { spawn, spawnSync } from 'node:child_process'
import { accessSync, constants, existsSync, readFileSync, readdirSync } from 'node:fs'
import { join } from 'node:path'

/** Oldest PostgreSQL whose features the schema uses. */
export const oldestVersion = 15

const debian = '/usr/lib/postgresql'

/** @param {string} folder */
function holdsServer(folder) {
  return ['initdb', 'pg_ctl', 'postgres'].every(name => isExecutable(join(folder, name)))
}

/** @param {string} path */
function isExecutable(path) {
  try {
    accessSync(path, constants.X_OK)
    return true
  } catch {
    return false
  }
}

/**
 * Major version in the answer of `postgres --version`, such as "postgres (PostgreSQL) 15.14 (Debian 15.14-0)".
 *
 * @param {string} answer
 * @returns {number | null}
 */
export function majorVersionIn(answer) {
  const found = /\(PostgreSQL\)\s+(\d+)/.exec(answer)
  return found === null ? null : Number(found[1])
}

/**
 * Finds the folder with initdb, pg_ctl and postgres: Debian's, newest first, then those on the PATH.
 *
 * @param {number} [version] only this major version: a data folder opens with the one that made it
 * @returns {string | null}
 */
export function findPostgresPrograms(version) {
  const fits = /** @param {number} found */ found => (version === undefined ? found >= oldestVersion : found === version)
  const installed = existsSync(debian) ? readdirSync(debian).map(Number).filter(fits).sort((a, b) => b - a) : []
  const fromDebian = installed.map(found => join(debian, String(found), 'bin')).find(holdsServer)
  if (fromDebian !== undefined) return fromDebian
  const onPath = (process.env.PATH ?? '').split(':').filter(folder => folder !== '' && holdsServer(folder))
  return onPath.find(folder => {
    const found = majorVersionIn(spawnSync(join(folder, 'postgres'), ['--version'], { encoding: 'utf8' }).stdout ?? '')
    return found !== null && fits(found)
  }) ?? null
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
 * It stands in a session of its own: Ctrl-C in the terminal must not break it off half-way; whoever called closes in order.
 *
 * @param {string} program full path
 * @param {readonly string[]} parameters
 * @param {{ quiet?: boolean }} [options] quiet: no output is read (a daemon would keep the pipe open)
 * @returns {Promise<{ status: number, output: string }>}
 */
export function runProgram(program, parameters, options = {}) {
  const account = unprivilegedAccount()
  const [command, given] = account === null
    ? [program, parameters]
    : ['setpriv', [`--reuid=${account.uid}`, `--regid=${account.gid}`, '--clear-groups', '--', program, ...parameters]]
  const child = spawn(command, given, {
    // The account may not enter the folder we stand in.
    cwd: '/',
    env: { PATH: process.env.PATH, LANG: 'C.UTF-8', LC_ALL: 'C.UTF-8' },
    stdio: options.quiet === true ? 'ignore' : ['ignore', 'pipe', 'pipe'],
    detached: true,
  })
  let output = ''
  for (const stream of [child.stdout, child.stderr]) stream?.setEncoding('utf8').on('data', text => { output += text })
  return new Promise((resolve, reject) => {
    child.once('error', reject)
    child.once('close', code => resolve({ status: code ?? 1, output: output.trim() }))
  })
}
