import { existsSync, readFileSync, readdirSync, readlinkSync, rmSync, statSync } from 'node:fs'
import { join } from 'node:path'
import { setTimeout as wait } from 'node:timers/promises'

/**
 * What the process table says about one process.
 *
 * @typedef {object} ProcessFacts
 * @property {number} pid
 * @property {number} uid whose it is
 * @property {readonly string[]} words its command line; PostgreSQL's workers have one word, "postgres: checkpointer"
 * @property {string | null} folder where it stands; null when we may not know
 */

/** @returns {ProcessFacts[]} empty where there is no /proc */
export function processTable() {
  if (!existsSync('/proc/self/cmdline')) return []
  return readdirSync('/proc').filter(name => /^\d+$/.test(name)).flatMap(name => {
    try {
      const words = readFileSync(`/proc/${name}/cmdline`, 'utf8').split('\0').filter(word => word !== '')
      return [{ pid: Number(name), uid: statSync(`/proc/${name}`).uid, words, folder: folderOf(name) }]
    } catch {
      return [] // Ended between the list and the look.
    }
  })
}

/** @param {string} pid */
function folderOf(pid) {
  try {
    return readlinkSync(`/proc/${pid}/cwd`)
  } catch {
    return null
  }
}

/**
 * Who works on a data folder.
 *
 * A number in postmaster.pid proves nothing: after a hard end it is left behind, and the number may be another process's by
 * then. The command line and the folder a process stands in do: every PostgreSQL process stands in its data folder.
 *
 * @param {string} dataFolder
 * @param {number | null} pidInFile first line of postmaster.pid
 * @param {number} owner uid of the data folder; PostgreSQL runs only as its owner
 * @param {readonly ProcessFacts[]} table
 * @returns {{ kind: 'runs', pid: number } | { kind: 'orphans', pids: number[] } | { kind: 'nobody' } | { kind: 'unclear' }}
 *   orphans are workers whose postmaster was killed: they end by themselves, and nobody may start here before; unclear where
 *   workers run whose folder we may not see (root in a container)
 */
export function whoWorksOn(dataFolder, pidInFile, owner, table) {
  const isPostgres = facts => facts.uid === owner && /(^|\/)postgres(:|$)/.test(facts.words[0] ?? '')
  const master = table.find(facts => facts.pid === pidInFile && isPostgres(facts) && (facts.words.includes(dataFolder) || facts.folder === dataFolder))
  if (master !== undefined) return { kind: 'runs', pid: master.pid }
  const pids = table.filter(facts => isPostgres(facts) && facts.folder === dataFolder).map(facts => facts.pid)
  if (pids.length > 0) return { kind: 'orphans', pids }
  return table.some(facts => isPostgres(facts) && facts.folder === null) ? { kind: 'unclear' } : { kind: 'nobody' }
}

/** @param {string} dataFolder */
function pidIn(dataFolder) {
  try {
    const pid = Number.parseInt(readFileSync(join(dataFolder, 'postmaster.pid'), 'utf8'), 10)
    return Number.isInteger(pid) ? pid : null
  } catch {
    return null
  }
}

/** @param {string} dataFolder */
function look(dataFolder) {
  if (!existsSync(dataFolder)) return { kind: 'nobody' }
  return whoWorksOn(dataFolder, pidIn(dataFolder), statSync(dataFolder).uid, processTable())
}

/**
 * The pid of the PostgreSQL that runs on this data folder.
 *
 * @param {string} dataFolder
 * @returns {number | null}
 */
export function runningPostgres(dataFolder) {
  const found = look(dataFolder)
  return found.kind === 'runs' ? found.pid : null
}

/**
 * Whether a process works, whoever owns it. One that has ended and that nobody has fetched yet, as in a container whose first
 * process fetches nobody, does not.
 *
 * @param {number} pid
 */
export function isAlive(pid) {
  try {
    process.kill(pid, 0)
  } catch (error) {
    if (error.code !== 'EPERM') return false
  }
  try {
    return !/^State:\s+[ZX]/m.test(readFileSync(`/proc/${pid}/status`, 'utf8'))
  } catch {
    return !existsSync('/proc/self/status')
  }
}

/**
 * Makes a data folder that nobody runs on ready for a start after a hard end: waits for workers whose postmaster was killed,
 * then removes a pid file whose number another process has by now, which would keep PostgreSQL from starting.
 *
 * @param {string} dataFolder
 */
export async function clearAfterHardEnd(dataFolder) {
  for (let attempt = 0; attempt < 50; attempt++) {
    const found = look(dataFolder)
    // Unclear: the file stays, and PostgreSQL's own check of its shared memory decides.
    if (found.kind === 'runs' || found.kind === 'unclear') return
    if (found.kind === 'nobody') {
      const pid = pidIn(dataFolder)
      // Where no process answers to the number PostgreSQL sees by itself that the file is left over.
      if (pid !== null && processTable().length > 0 && isAlive(pid)) rmSync(join(dataFolder, 'postmaster.pid'), { force: true })
      return
    }
    // A worker notices within moments that its postmaster is gone; one that hangs is told after two seconds.
    if (attempt >= 10) for (const pid of found.pids) signal(pid, attempt < 30 ? 'SIGQUIT' : 'SIGKILL')
    await wait(200)
  }
}

function signal(pid, name) {
  try {
    process.kill(pid, name)
  } catch {
    // Gone, or not ours: PostgreSQL's own check of its shared memory then refuses the start.
  }
}
