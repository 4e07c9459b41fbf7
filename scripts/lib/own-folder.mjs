import { randomBytes } from 'node:crypto'
import { existsSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { setTimeout as wait } from 'node:timers/promises'
import { dataFolderIn, makePrivateFolder, startCluster } from '../../db/cluster/cluster.mjs'
import { isAlive } from '../../db/cluster/postmaster.mjs'
import { close, closeLater, isClosing, ourKeeper } from './closing.mjs'
import { installPostgres } from './install.mjs'
import { holderOf, isStillThere, takeLock } from './lock.mjs'
import { dataFolder } from './places.mjs'
import { step } from './say.mjs'

/**
 * Takes this checkout's data folder for the present run; only one run at a time may.
 *
 * @returns {Promise<{ folder: string, noteServer: (pid: number) => void, noteAddress: (address: string) => void }>}
 */
export async function takeDataFolder() {
  const folder = dataFolder()
  makePrivateFolder(folder)
  const lockFile = join(folder, 'running.json')
  const lock = takeLock(lockFile)
  if (lock.kind === 'held') {
    const { address, pid } = lock.facts
    throw new Error(typeof address === 'string'
      ? `Fanlight already runs from this folder: ${address}   (process ${pid}; end that one first)`
      : `Fanlight is already being started from this folder (process ${pid}). Its address appears there.`)
  }
  closeLater(lock.release)
  ourKeeper().tell('lock', lockFile)
  await endFormerServer(lock.former?.server)
  const facts = {}
  const note = more => lock.note(Object.assign(facts, more))
  return {
    folder,
    noteServer(pid) {
      ourKeeper().tell('group', pid)
      note({ server: holderOf(pid) })
    },
    noteAddress: address => note({ address }),
  }
}

/** A server whose start script was killed hard may be about to end still: two would write to one database. */
async function endFormerServer(server) {
  for (let attempt = 0; isStillThere(server ?? null) && attempt < 60; attempt++) {
    process.kill(server.pid, attempt < 40 ? 'SIGTERM' : 'SIGKILL')
    await wait(100)
  }
}

/**
 * The URL of the database: DATABASE_URL, or else this checkout's own PostgreSQL, which is started.
 *
 * @param {{ folder: string }} own
 */
export async function openDatabase({ folder }) {
  const given = process.env.DATABASE_URL
  if (given !== undefined && given !== '') return given
  await installPostgres()
  ourKeeper().tell('cluster', dataFolderIn(folder))
  const cluster = await step('starting PostgreSQL', () => startCluster({ folder, durable: true }))
  ourKeeper().tell('postgres', cluster.pid)
  const watch = setInterval(() => {
    if (isAlive(cluster.pid) || isClosing()) return
    clearInterval(watch)
    process.stderr.write(`\nPostgreSQL ended by itself. Its log: ${join(folder, 'postgres-log')}\nStart again to recover.\n`)
    void close(1)
  }, 2_000)
  watch.unref()
  closeLater(cluster.stop)
  return cluster.url
}

/**
 * SESSION_SECRET, or the one of this checkout: the same at every start, or everybody would be signed out by it.
 *
 * @param {string} folder
 */
export function sessionSecret(folder) {
  const given = process.env.SESSION_SECRET
  if (given !== undefined && given !== '') return given
  const path = join(folder, 'session-secret')
  if (!existsSync(path)) writeFileSync(path, randomBytes(32).toString('hex'), { mode: 0o600 })
  return readFileSync(path, 'utf8').trim()
}
