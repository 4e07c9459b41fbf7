// npm run dev: PostgreSQL, server and client with hot reload of both sides.
import { spawn } from 'node:child_process'
import { join } from 'node:path'
import { findFreePort, makePrivateFolder, startCluster } from '../db/cluster/cluster.mjs'
import { checkNode, installPackages, installPostgres, root } from './lib/install.mjs'
import { takeLock } from './lib/lock.mjs'
import { dataFolder } from './lib/places.mjs'
import { giveUp, say, step } from './lib/say.mjs'

checkNode()
const folder = dataFolder(root)
makePrivateFolder(folder, process.getuid?.() === 0 ? 0o711 : 0o700)
const lock = takeLock(folder)
if (lock.kind === 'running') giveUp(`Fanlight already runs from this folder: ${lock.address}`)
await installPackages()
let url = process.env.DATABASE_URL
let stopCluster = () => {}
if (url === undefined || url === '') {
  await installPostgres()
  const cluster = await step('starting PostgreSQL', () => startCluster({ folder, durable: true }))
  url = cluster.url
  stopCluster = cluster.stop
}
const apiPort = await findFreePort()
const clientPort = Number(process.env.PORT ?? 5173)
const environment = { ...process.env, DATABASE_URL: url, PORT: String(apiPort), PUBLIC_URL: `http://127.0.0.1:${clientPort}`, FANLIGHT_API_PORT: String(apiPort) }
// tsx watches the server's files; Vite passes /api on to it.
const children = [
  spawn(process.execPath, [join(root, 'node_modules', 'tsx', 'dist', 'cli.mjs'), 'watch', '--clear-screen=false', 'server/main.ts'], { cwd: root, env: environment, stdio: ['ignore', 'inherit', 'inherit'], detached: true }),
  spawn(process.execPath, [join(root, 'node_modules', 'vite', 'bin', 'vite.js'), '--host', '127.0.0.1', '--port', String(clientPort)], { cwd: root, env: environment, stdio: ['ignore', 'inherit', 'inherit'], detached: true }),
]
lock.note(`http://127.0.0.1:${clientPort}`)
say(`Client with hot reload: http://127.0.0.1:${clientPort}   (API on ${apiPort})`)

let ending = false
async function close() {
  if (ending) return
  ending = true
  await Promise.all(children.map(child => new Promise(resolve => {
    if (child.exitCode !== null) return resolve()
    child.once('exit', resolve)
    // The whole group: the watcher's server is its child.
    try { process.kill(-child.pid, 'SIGTERM') } catch { resolve() }
    setTimeout(resolve, 10_000)
  })))
  stopCluster()
  lock.release()
  process.exit(0)
}
for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.on(signal, () => void close())
for (const child of children) child.once('exit', () => void close())
