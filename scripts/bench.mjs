// npm run bench: what costs time beside a yardstick in the same run, as ratios.
import { spawnSync } from 'node:child_process'
import { mkdtempSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { buildClient } from './lib/build-client.mjs'
import { checkNode, installPackages, installPostgres, root } from './lib/install.mjs'
import { startThrowAwayCluster } from './lib/throw-away-cluster.mjs'

checkNode()
await installPackages()
await installPostgres()
await buildClient()
const cluster = await startThrowAwayCluster(mkdtempSync(join(tmpdir(), 'fanlight-bench-')))
const { status } = spawnSync(process.execPath, ['--import', 'tsx', 'tests/bench/run.ts', ...process.argv.slice(2)], {
  cwd: root, stdio: 'inherit', env: { ...process.env, TEST_DATABASE_URL: cluster.url },
})
cluster.remove()
process.exit(status ?? 1)
