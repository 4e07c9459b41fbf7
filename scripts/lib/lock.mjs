import { readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'

/** Whether a process is the start script it claims to be: numbers are reused. */
function isStartScript(pid) {
  try {
    return readFileSync(`/proc/${pid}/cmdline`, 'utf8').split('\0').some(word => /(start|dev)\.mjs$/.test(word))
  } catch {
    return false
  }
}

/**
 * Takes the folder for this run.
 *
 * @param {string} folder
 * @returns {{ kind: 'taken', note: (address: string) => void, release: () => void } | { kind: 'running', address: string }}
 */
export function takeLock(folder) {
  const path = join(folder, 'running.json')
  for (let attempt = 0; attempt < 2; attempt++) {
    try {
      writeFileSync(path, JSON.stringify({ pid: process.pid, address: 'starting' }), { flag: 'wx', mode: 0o600 })
      return {
        kind: 'taken',
        note: address => writeFileSync(path, JSON.stringify({ pid: process.pid, address }), { mode: 0o600 }),
        release: () => rmSync(path, { force: true }),
      }
    } catch (error) {
      if (error.code !== 'EEXIST') throw error
      const former = readLock(path)
      if (former !== null && former.pid !== process.pid && isStartScript(former.pid)) return { kind: 'running', address: former.address }
      // Left over from a run that was killed.
      rmSync(path, { force: true })
    }
  }
  throw new Error(`The lock ${path} cannot be taken.`)
}

function readLock(path) {
  try {
    return JSON.parse(readFileSync(path, 'utf8'))
  } catch {
    return null
  }
}
