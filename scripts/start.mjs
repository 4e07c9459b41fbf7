// npm start: installs what is missing, starts PostgreSQL, migrates, seeds, serves client and API on one port.
import { randomBytes } from 'node:crypto'
import { existsSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { performance } from 'node:perf_hooks'
import { findFreePort, makePrivateFolder, startCluster } from '../db/cluster/cluster.mjs'
import { buildClient, clientFolder } from './lib/build-client.mjs'
import { checkNode, installPackages, installPostgres, root } from './lib/install.mjs'
import { takeLock } from './lib/lock.mjs'
import { dataFolder } from './lib/places.mjs'
import { giveUp, say, step } from './lib/say.mjs'
import { startServer, stopServer } from './lib/server-process.mjs'

const began = performance.now()
/** What must be closed, last opened first. */
const open = []
let ending = false

async function close(code) {
  if (ending) return
  ending = true
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

for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) {
  process.on(signal, () => {
    if (!ending) say('\nClosing …')
    void close(0)
  })
}

async function choosePort() {
  const wanted = process.env.PORT
  if (wanted !== undefined && wanted !== '') {
    return findFreePort(Number(wanted)).catch(() => {
      throw new Error(`Port ${wanted} is in use. Set PORT to another one, or leave it out to have a free one chosen.`)
    })
  }
  for (let port = 3000; port < 3100; port++) {
    const free = await findFreePort(port).catch(() => null)
    if (free !== null) return free
  }
  return findFreePort()
}

function secretIn(folder) {
  const path = join(folder, 'session-secret')
  if (!existsSync(path)) writeFileSync(path, randomBytes(32).toString('hex'), { mode: 0o600 })
  return readFileSync(path, 'utf8').trim()
}

async function main() {
  checkNode()
  const folder = dataFolder(root)
  makePrivateFolder(folder, process.getuid?.() === 0 ? 0o711 : 0o700)
  const lock = takeLock(folder)
  if (lock.kind === 'running') throw new Error(`Fanlight already runs from this folder: ${lock.address}`)
  open.push(lock.release)

  await installPackages()
  let databaseUrl = process.env.DATABASE_URL
  if (databaseUrl === undefined || databaseUrl === '') {
    await installPostgres()
    const cluster = await step('starting PostgreSQL', () => startCluster({ folder, durable: true }))
    open.push(cluster.stop)
    databaseUrl = cluster.url
  }
  await buildClient()
  const port = await choosePort()
  const { child, ready } = await step('starting the server', () => startServer({
    logFile: join(folder, 'server-log'),
    environment: {
      DATABASE_URL: databaseUrl,
      PORT: String(port),
      SESSION_SECRET: process.env.SESSION_SECRET ?? secretIn(folder),
      CLIENT_FOLDER: clientFolder,
    },
  }))
  open.push(() => stopServer(child))
  child.once('exit', code => {
    if (ending) return
    process.stderr.write(`\nThe server ended by itself (code ${code}). Its log: ${join(folder, 'server-log')}\n`)
    void close(1)
  })
  lock.note(ready.url)

  say(`\nFanlight is ready after ${((performance.now() - began) / 1000).toFixed(1)} s:  ${ready.url}\n`)
  if (ready.demo.length > 0) {
    say('Sign in to the demo shop as:')
    for (const { role, email, password } of ready.demo) say(`  ${role.padEnd(11)} ${email.padEnd(34)} ${password}`)
  }
  say(`\nData: ${folder}\nCtrl-C ends everything.`)
}

main().catch(async error => {
  process.stderr.write(`\n${error.message}\n`)
  await close(1)
  giveUp('')
})
