import { spawn } from 'node:child_process'
import { createWriteStream, readFileSync } from 'node:fs'
import { createInterface } from 'node:readline'
import { root } from './install.mjs'

/**
 * Starts the server and waits until it says that it listens.
 *
 * It stands in a process group of its own, so that Ctrl-C reaches only us and the order of closing is ours; it ends by
 * itself when we are gone, since its standard input ends then.
 *
 * @param {object} options
 * @param {Record<string, string>} options.environment
 * @param {string} options.logFile
 * @param {readonly string[]} [options.nodeOptions]
 * @returns {Promise<{ child: import('node:child_process').ChildProcess, ready: { url: string, demo: { email: string, password: string, role: string }[] } }>}
 */
export function startServer({ environment, logFile, nodeOptions = [] }) {
  const child = spawn(process.execPath, [...nodeOptions, '--import', 'tsx', 'server/main.ts'], {
    cwd: root,
    env: { ...process.env, ...environment, FANLIGHT_ENDS_WITH_INPUT: 'yes' },
    stdio: ['pipe', 'pipe', 'pipe'],
    detached: true,
  })
  const log = createWriteStream(logFile, { flags: 'a', mode: 0o600 })
  child.stderr.pipe(log)
  return new Promise((resolve, reject) => {
    const lines = createInterface({ input: child.stdout })
    lines.on('line', line => {
      if (line.startsWith('FANLIGHT_READY ')) resolve({ child, ready: JSON.parse(line.slice('FANLIGHT_READY '.length)) })
      else log.write(`${line}\n`)
    })
    child.once('error', reject)
    child.once('exit', code => {
      // The log's last words reach the file a moment later.
      setTimeout(() => {
        const end = readFileSync(logFile, 'utf8').trim().split('\n').slice(-8).join('\n')
        reject(new Error(`The server ended by itself (code ${code}). Its log (${logFile}) ends with:\n${end}`))
      }, 200)
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
