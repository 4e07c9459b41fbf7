// npm run db:migrate and db:seed: on DATABASE_URL, or on the PostgreSQL of this checkout.
import { spawnSync } from 'node:child_process'
import { makePrivateFolder, startCluster } from '../db/cluster/cluster.mjs'
import { checkNode, installPackages, installPostgres, root } from './lib/install.mjs'
import { takeLock } from './lib/lock.mjs'
import { dataFolder } from './lib/places.mjs'
import { giveUp, say } from './lib/say.mjs'

const task = process.argv[2]
if (task !== 'migrate' && task !== 'seed') giveUp('Say what to do: node scripts/database.mjs migrate|seed')
checkNode()
await installPackages()

let url = process.env.DATABASE_URL
let stop = () => {}
if (url === undefined || url === '') {
  await installPostgres()
  const folder = dataFolder(root)
  makePrivateFolder(folder, process.getuid?.() === 0 ? 0o711 : 0o700)
  // Starting a cluster stops what ran there before: never under a running server.
  const lock = takeLock(folder)
  if (lock.kind === 'running') giveUp(`Fanlight runs from this folder (${lock.address}); it migrates and seeds at its start.`)
  const cluster = await startCluster({ folder, durable: true })
  url = cluster.url
  stop = () => {
    cluster.stop()
    if (lock.kind === 'taken') lock.release()
  }
}
const { status } = spawnSync(process.execPath, ['--import', 'tsx', `db/tasks/${task}.ts`], { cwd: root, stdio: 'inherit', env: { ...process.env, DATABASE_URL: url } })
stop()
if (status === 0) say(task === 'migrate' ? 'The database is up to date.' : 'The demo shop is there.')
process.exit(status ?? 1)
