// npm run dev: PostgreSQL, server and client with hot reload of both sides.
import { spawn } from 'node:child_process'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import { findFreePort } from '../db/cluster/cluster.mjs'
import { close, closeLater, isClosing, ourKeeper, runScript } from './lib/closing.mjs'
import { checkNode, installPackages } from './lib/install.mjs'
import { openDatabase, sessionSecret, takeDataFolder } from './lib/own-folder.mjs'
import { choosePort } from './lib/ports.mjs'
import { root } from './lib/places.mjs'
import { say } from './lib/say.mjs'
import { readReady, saySignIns } from './lib/server-process.mjs'

let starts = 0
/** The server says anew at each start that it listens. */
function showServerLine(line) {
  const ready = readReady(line)
  if (ready === null) return say(line)
  starts += 1
  say(`${new Date().toTimeString().slice(0, 8)} the server ${starts === 1 ? 'is ready' : 'is ready again'}`)
  if (starts === 1) saySignIns(ready.demo)
}

/** Starts one of the two watchers in a group of its own: the server that tsx restarts is its child. */
function startWatcher(name, parameters, environment, show = say) {
  const child = spawn(process.execPath, parameters, { cwd: root, env: { ...process.env, ...environment }, stdio: ['ignore', 'pipe', 'inherit'], detached: true })
  createInterface({ input: child.stdout }).on('line', show)
  if (child.pid !== undefined) ourKeeper().tell('group', child.pid)
  child.once('exit', (code, signal) => {
    if (isClosing()) return
    process.stderr.write(`\n${name} ended by itself (${signal ?? `code ${code}`}).\n`)
    void close(1)
  })
  closeLater(() => new Promise(resolve => {
    const tell = signal => {
      try {
        process.kill(-child.pid, signal)
        return true
      } catch {
        return false
      }
    }
    const began = Date.now()
    tell('SIGTERM')
    // The whole group must be gone, not only the watcher.
    const look = setInterval(() => {
      const waited = Date.now() - began
      if (waited < 12_000 && tell(waited > 10_000 ? 'SIGKILL' : 0)) return
      clearInterval(look)
      resolve()
    }, 50)
  }))
}

runScript(async () => {
  checkNode()
  const own = await takeDataFolder()
  await installPackages()
  const databaseUrl = await openDatabase(own)
  const apiPort = await findFreePort()
  const clientPort = await choosePort(process.env)
  const address = `http://127.0.0.1:${clientPort}`
  const environment = {
    DATABASE_URL: databaseUrl,
    PORT: String(apiPort),
    PUBLIC_URL: process.env.PUBLIC_URL ?? address,
    SESSION_SECRET: sessionSecret(own.folder),
    FANLIGHT_API_PORT: String(apiPort),
  }
  if (isClosing()) return
  startWatcher('The server', [join(root, 'node_modules', 'tsx', 'dist', 'cli.mjs'), 'watch', '--clear-screen=false', 'server/main.ts'], environment, showServerLine)
  startWatcher('Vite', [join(root, 'node_modules', 'vite', 'bin', 'vite.js'), '--host', '127.0.0.1', '--port', String(clientPort), '--strictPort'], environment)
  own.noteAddress(address)
  say(`\nClient with hot reload: ${address}   (API on ${apiPort})\nCtrl-C ends everything.\n`)
}, { signalIsFine: true })
