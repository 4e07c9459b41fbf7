import { spawn } from 'node:child_process'
import { appendFileSync } from 'node:fs'
import { createInterface } from 'node:readline'
import { beginLog } from '../../db/cluster/cluster.mjs'
import { ClosingError, isClosing, whenClosing } from './closing.mjs'
import { root } from './places.mjs'
import { say } from './say.mjs'

/**
 * @typedef {{ url: string, demo: { email: string, password: string, role: string }[] }} Ready
 */

const readyMark = 'FANLIGHT_READY '

/**
 * What the server says when it listens.
 *
 * @param {string} line of its standard output
 * @returns {Ready | null} null for any other line
 */
export function readReady(line) {
  return line.startsWith(readyMark) ? JSON.parse(line.slice(readyMark.length)) : null
}

/** @param {Ready['demo']} demo */
export function saySignIns(demo) {
  if (demo.length === 0) return
  say('Sign in to the demo shop as:')
  for (const { role, email, password } of demo) say(`  ${role.padEnd(11)} ${email.padEnd(34)} ${password}`)
}

/**
 * What a person can act on in the end of a log: sentences, without the places in the code they came from.
 *
 * @param {readonly string[]} lines
 * @returns {string[]} at most eight
 */
export function readableWords(lines) {
  const readable = lines.map(line => {
    if (!line.startsWith('{')) return line
    try {
      const { msg, err } = JSON.parse(line)
      return [msg, err?.message].filter(part => typeof part === 'string').join(': ')
    } catch {
      return line
    }
  })
  // Node's own report of an error: the line of code, a caret below it, the stack, its version.
  const noise = /^(\s+at |Node\.js v|file:\/\/|\/\S+:\d+$|node:internal|\s*throw |\s*\^+\s*$|\s*$)/
  const kept = readable.filter(line => !noise.test(line))
  return (kept.length > 0 ? kept : [...lines]).slice(-8)
}

/**
 * Starts the server and waits until it says that it listens.
 *
 * It stands in a process group of its own, so that Ctrl-C reaches only us and the order of closing is ours; it ends by
 * itself when we are gone, since its standard input ends then.
 *
 * @param {object} options
 * @param {Record<string, string>} options.environment
 * @param {string} options.logFile
 * @param {(pid: number) => void} options.started told the process number at once
 * @returns {Promise<{ child: import('node:child_process').ChildProcess, ready: Ready }>}
 */
export function startServer({ environment, logFile, started }) {
  if (isClosing()) return Promise.reject(new ClosingError('closing'))
  beginLog(logFile)
  const child = spawn(process.execPath, ['--import', 'tsx', 'server/main.ts'], {
    cwd: root,
    env: { ...process.env, ...environment, FANLIGHT_ENDS_WITH_INPUT: 'yes' },
    stdio: ['pipe', 'pipe', 'pipe'],
    detached: true,
  })
  child.stdin.on('error', () => {})
  if (child.pid !== undefined) started(child.pid)
  const lastWords = []
  const keep = line => {
    appendFileSync(logFile, `${line}\n`)
    lastWords.push(line)
    if (lastWords.length > 60) lastWords.shift()
  }
  return new Promise((resolve, reject) => {
    let ready = false
    whenClosing(() => {
      if (!ready) child.kill('SIGTERM')
    })
    createInterface({ input: child.stderr }).on('line', keep)
    createInterface({ input: child.stdout }).on('line', line => {
      const facts = readReady(line)
      if (facts === null) return keep(line)
      ready = true
      resolve({ child, ready: facts })
    })
    child.once('error', reject)
    // Not "exit": by then its last words may still be under way.
    child.once('close', (code, signal) => {
      reject(new Error(`The server ended by itself (${signal ?? `code ${code}`}). Its last words, from ${logFile}:\n${readableWords(lastWords).join('\n')}`))
    })
  })
}

/** Asks the server to close and waits; after the time it takes to finish what it does, it is ended. */
export function stopServer(child) {
  if (child.exitCode !== null || child.signalCode !== null) return Promise.resolve()
  return new Promise(resolve => {
    const hard = setTimeout(() => child.kill('SIGKILL'), 15_000)
    child.once('exit', () => {
      clearTimeout(hard)
      resolve()
    })
    child.kill('SIGTERM')
  })
}
