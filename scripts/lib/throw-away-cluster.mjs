import { rmSync } from 'node:fs'
import { startCluster } from '../../db/cluster/cluster.mjs'

/**
 * A PostgreSQL for tests and benchmarks, removed afterwards, whether they pass, fail or are broken off.
 *
 * @param {string} folder an empty folder of its own
 */
export async function startThrowAwayCluster(folder) {
  const cluster = await startCluster({ folder, durable: false })
  let removed = false
  const remove = () => {
    if (removed) return
    removed = true
    cluster.stop()
    rmSync(folder, { recursive: true, force: true })
  }
  process.once('exit', remove)
  for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.once(signal, () => process.exit(1))
  return { url: cluster.url, remove }
}
