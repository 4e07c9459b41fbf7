import { mkdtempSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { dataFolderIn, startCluster } from '../../db/cluster/cluster.mjs'
import { closeLater, ourKeeper } from './closing.mjs'
import { temporaryFolder } from './places.mjs'
import { step } from './say.mjs'

/**
 * A PostgreSQL for tests and benchmarks, removed when the script closes, whether they pass, fail or are broken off, or the
 * script is killed hard.
 *
 * @returns {Promise<{ url: string, folder: string }>}
 */
export async function startThrowAwayCluster() {
  const folder = mkdtempSync(join(temporaryFolder(), 'fanlight-test-'))
  const keeper = ourKeeper()
  keeper.tell('folder', folder)
  keeper.tell('cluster', dataFolderIn(folder))
  closeLater(() => rmSync(folder, { recursive: true, force: true }))
  const cluster = await step('starting a PostgreSQL of our own', () => startCluster({ folder, durable: false }))
  keeper.tell('postgres', cluster.pid)
  closeLater(cluster.stop)
  return { url: cluster.url, folder }
}
