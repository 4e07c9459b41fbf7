import { performance } from 'node:perf_hooks'

/** One line for the person who waits. */
export function say(sentence) {
  process.stdout.write(`${sentence}\n`)
}

/**
 * Runs a step and says how long it took; what takes no time is not worth a second line.
 *
 * @template T
 * @param {string} what
 * @param {() => Promise<T> | T} work
 * @returns {Promise<T>}
 */
export async function step(what, work) {
  const start = performance.now()
  say(`… ${what}`)
  const result = await work()
  const seconds = (performance.now() - start) / 1000
  if (seconds > 1) say(`  done in ${seconds.toFixed(1)} s`)
  return result
}

/** Ends with a sentence instead of a stack trace: the person can act on a sentence. */
export function giveUp(sentence) {
  process.stderr.write(`\n${sentence}\n`)
  process.exit(1)
}
