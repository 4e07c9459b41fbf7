import { spawn } from 'node:child_process'
import { startKeeper } from './keeper.mjs'
import { say } from './say.mjs'

/** What must be closed, last opened first. */
const open = []
/** What must be broken off at once, so that the present step ends. */
const breakOff = []
/** Process groups of programs under way. */
const running = new Map()
let ending = false
let keeper = null
let work = Promise.resolve()

/** Thrown where a step finds that we are closing. */
export class ClosingError extends Error {}

/** The process that ends what we leave behind should we be killed hard. */
export function ourKeeper() {
  if (keeper === null) {
    keeper = startKeeper()
    // Dismissed last, when nothing is left to be looked after.
    open.unshift(keeper.dismiss)
  }
  return keeper
}

export function isClosing() {
  return ending
}

/** @param {() => Promise<void> | void} part undoes what was just opened */
export function closeLater(part) {
  open.push(part)
}

/** @param {() => void} part ends a step that would otherwise be waited for */
export function whenClosing(part) {
  breakOff.push(part)
}

/** Closes everything that is open, in order, and ends. */
export async function close(code) {
  if (ending) return
  ending = true
  for (const part of breakOff) part()
  for (const { child, hardAfterMilliseconds } of running.values()) endGroup(child, hardAfterMilliseconds)
  // What is half opened is opened first: only then do we know how to close it.
  await work.catch(() => {})
  for (const part of open.reverse()) {
    try {
      await part()
    } catch (error) {
      process.stderr.write(`${error.message}\n`)
      code ||= 1
    }
  }
  process.exit(code)
}

/**
 * Runs a script's work: signals close in order, an error ends with its sentence.
 *
 * @param {() => Promise<number | void>} main answers an exit code to end with, or nothing to stay
 * @param {{ signalIsFine?: boolean }} [options] whether Ctrl-C is how one ends it, or breaks it off
 */
export function runScript(main, { signalIsFine = false } = {}) {
  for (const [name, number] of [['SIGINT', 2], ['SIGTERM', 15], ['SIGHUP', 1]]) {
    process.on(name, () => {
      if (!ending) say('\nClosing …')
      void close(signalIsFine ? 0 : 128 + number)
    })
  }
  const fail = error => {
    if (!ending) process.stderr.write(`\n${error.message}\n`)
    void close(1)
  }
  process.on('uncaughtException', fail)
  process.on('unhandledRejection', fail)
  work = main().then(code => {
    if (code !== undefined) setImmediate(() => void close(code))
  })
  work.catch(fail)
}

/** Ends a program with all that it started. */
function endGroup(child, hardAfterMilliseconds) {
  const tell = name => {
    try {
      process.kill(-child.pid, name)
    } catch {
      // Already gone.
    }
  }
  tell('SIGTERM')
  setTimeout(() => tell('SIGKILL'), hardAfterMilliseconds).unref()
}

/**
 * Runs a program to its end in a process group of its own, so that nothing of it stays when we close.
 *
 * @param {string} command
 * @param {readonly string[]} parameters
 * @param {object} [options]
 * @param {string} [options.cwd]
 * @param {Record<string, string | undefined>} [options.env]
 * @param {boolean} [options.show] output goes to the terminal instead of the answer
 * @param {number} [options.minutesMax]
 * @param {number} [options.hardAfterMilliseconds] how long it may take to end when we close
 * @param {boolean} [options.mayOutlive] it is left to finish when we are killed hard
 * @returns {Promise<{ status: number, output: string }>}
 */
export function runChild(command, parameters, { cwd, env, show = false, minutesMax = 60, hardAfterMilliseconds = 5_000, mayOutlive = false } = {}) {
  if (ending) return Promise.reject(new ClosingError('closing'))
  // Output that we may show later, in whatever surroundings, comes without colours.
  const environment = show ? env : { ...(env ?? process.env), NO_COLOR: '1', FORCE_COLOR: undefined }
  const child = spawn(command, parameters, { cwd, env: environment, stdio: show ? ['ignore', 'inherit', 'inherit'] : ['ignore', 'pipe', 'pipe'], detached: true })
  if (child.pid !== undefined) {
    running.set(child.pid, { child, hardAfterMilliseconds })
    if (!mayOutlive) ourKeeper().tell('group', child.pid)
  }
  const limit = setTimeout(() => {
    process.stderr.write(`\n${parameters[0]} takes longer than ${minutesMax} minutes and is ended.\n`)
    endGroup(child, hardAfterMilliseconds)
  }, minutesMax * 60_000)
  let output = ''
  for (const stream of [child.stdout, child.stderr]) stream?.setEncoding('utf8').on('data', text => { output += text })
  return new Promise((resolve, reject) => {
    child.once('error', reject)
    child.once('close', code => {
      clearTimeout(limit)
      running.delete(child.pid)
      if (!mayOutlive) ourKeeper().tell('ended', child.pid)
      if (ending) reject(new ClosingError('closing'))
      else resolve({ status: code ?? 1, output })
    })
  })
}
