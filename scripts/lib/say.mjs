import { performance } from 'node:perf_hooks'

// A terminal that went away, or a reader such as head that had enough, must not end us before we have closed in order.
process.stdout.on('error', () => {})
process.stderr.on('error', () => {})

/** One line for the person who waits. */
export function say(sentence) {
  process.stdout.write(`${sentence}\n`)
}

const secondsSince = start => (performance.now() - start) / 1000

/** How often a long step says that it is still at work; in a terminal one line counts instead. */
const progressMilliseconds = process.stdout.isTTY ? 1_000 : 15_000

/**
 * Runs a step and says how long it takes.
 *
 * @template T
 * @param {string} what
 * @param {() => Promise<T> | T} work
 * @returns {Promise<T>}
 */
export async function step(what, work) {
  const start = performance.now()
  const inTerminal = process.stdout.isTTY === true
  process.stdout.write(inTerminal ? `… ${what}` : `… ${what}\n`)
  const timer = setInterval(() => {
    const seconds = Math.round(secondsSince(start))
    process.stdout.write(inTerminal ? `\r… ${what}  ${seconds} s` : `  … ${what}: ${seconds} s so far\n`)
  }, progressMilliseconds)
  try {
    const result = await work()
    const end = `✓ ${what}, ${secondsSince(start).toFixed(1)} s`
    process.stdout.write(inTerminal ? `\r${end}   \n` : `${end}\n`)
    return result
  } catch (error) {
    process.stdout.write(inTerminal ? '\n' : '')
    throw error
  } finally {
    clearInterval(timer)
  }
}

/** Ends with a sentence instead of a stack trace: the person can act on a sentence. */
export function giveUp(sentence) {
  process.stderr.write(`\n${sentence}\n`)
  process.exit(1)
}
