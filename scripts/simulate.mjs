// npm run simulate: coverage and width of every interval that is shown, as tables with Monte Carlo error.
import { spawnSync } from 'node:child_process'
import { checkNode, installPackages, root } from './lib/install.mjs'

checkNode()
await installPackages()
const { status } = spawnSync(process.execPath, ['--import', 'tsx', 'tests/simulation/run.ts', ...process.argv.slice(2)], { cwd: root, stdio: 'inherit' })
process.exit(status ?? 1)
