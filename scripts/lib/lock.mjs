import { linkSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { setTimeout as wait } from 'node:timers/promises'
import { ClosingError, isClosing } from './closing.mjs'

/**
 * When a process began, in the kernel's ticks: with it a number that another process has by now is told apart.
 *
 * @param {number} pid
 * @returns {string | null} null when there is none
 */
export function beginOf(pid) {
  try {
    // The second field is a name in brackets that may hold blanks and brackets itself.
    const fields = readFileSync(`/proc/${pid}/stat`, 'utf8').replace(/^.*\) /s, '').split(' ')
    // A zombie has ended; only its parent has not looked yet.
    return fields[0] === 'Z' ? null : fields[19] ?? null
  } catch {
    return withoutProc(pid)
  }
}

/** Where there is no /proc the number alone must do. */
function withoutProc(pid) {
  if (process.platform === 'linux') return null
  try {
    process.kill(pid, 0)
    return 'unknown'
  } catch (error) {
    return error.code === 'EPERM' ? 'unknown' : null
  }
}

/**
 * @typedef {{ pid: number, began: string | null }} Holder
 * @param {Holder | null} holder
 */
export function isStillThere(holder) {
  return holder !== null && Number.isInteger(holder.pid) && holder.pid > 0 && beginOf(holder.pid) !== null && beginOf(holder.pid) === holder.began
}

/** @param {number} pid */
export function holderOf(pid) {
  return { pid, began: beginOf(pid) }
}

/** @returns {Record<string, unknown> & Holder | null} */
function readLock(path) {
  try {
    return JSON.parse(readFileSync(path, 'utf8'))
  } catch {
    return null
  }
}

/**
 * Takes a lock file, unless a process that is still there holds it.
 *
 * @param {string} path
 * @returns {{ kind: 'taken', former: Record<string, unknown> | null, note: (facts: Record<string, unknown>) => void, release: () => void } | { kind: 'held', facts: Record<string, unknown> }}
 *   former: what a holder that was killed left behind
 */
export function takeLock(path) {
  const own = `${path}.${process.pid}`
  const facts = holderOf(process.pid)
  const write = more => writeFileSync(own, JSON.stringify({ ...facts, ...more }), { mode: 0o600 })
  write({})
  let former = null
  try {
    for (let attempt = 0; attempt < 20; attempt++) {
      try {
        // A link appears whole and only once: nobody reads a half-written lock, and of two that come together one gets it.
        linkSync(own, path)
        return {
          kind: 'taken',
          former,
          note: more => {
            write(more)
            renameSync(own, path)
          },
          release: () => {
            if (readLock(path)?.pid === process.pid) rmSync(path, { force: true })
          },
        }
      } catch (error) {
        if (error.code !== 'EEXIST') throw error
        const found = readLock(path)
        if (isStillThere(found)) return { kind: 'held', facts: found }
        former = setAside(path) ?? former
      }
    }
  } finally {
    rmSync(own, { force: true })
  }
  throw new Error(`The lock ${path} cannot be taken.`)
}

/** Moves a lock whose holder is gone out of the way; should another have just taken it anew, it goes back. */
function setAside(path) {
  const aside = `${path}.left.${process.pid}`
  try {
    renameSync(path, aside)
  } catch {
    return null
  }
  const found = readLock(aside)
  if (isStillThere(found)) {
    try {
      linkSync(aside, path)
    } catch {
      // Somebody was faster; the next look tells.
    }
  }
  rmSync(aside, { force: true })
  return isStillThere(found) ? null : found
}

/**
 * Works alone among processes that take the same lock, one after the other.
 *
 * @template T
 * @param {string} path
 * @param {() => Promise<T>} work
 * @returns {Promise<T>}
 */
export async function alone(path, work) {
  for (;;) {
    const lock = takeLock(path)
    if (lock.kind === 'taken') {
      try {
        return await work()
      } finally {
        lock.release()
      }
    }
    await wait(300)
    if (isClosing()) throw new ClosingError('closing')
  }
}
