// npm run bench: what costs time beside a yardstick in the same run, as ratios.
import { runChild, runScript } from './lib/closing.mjs'
import { checkNode, installPackages, installPostgres } from './lib/install.mjs'
import { root } from './lib/places.mjs'
import { startThrowAwayCluster } from './lib/throw-away-cluster.mjs'

runScript(async () => {
  checkNode()
  await installPackages()
  await installPostgres()
  const cluster = await startThrowAwayCluster()
  const { status } = await runChild(process.execPath, ['--import', 'tsx', 'tests/bench/run.ts', ...process.argv.slice(2)], {
    cwd: root, show: true, env: { ...process.env, TEST_DATABASE_URL: cluster.url },
  })
  return status
})
