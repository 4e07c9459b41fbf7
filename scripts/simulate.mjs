// npm run simulate: coverage and width of every interval that is shown, as tables with Monte Carlo error.
import { runChild, runScript } from './lib/closing.mjs'
import { checkNode, installPackages } from './lib/install.mjs'
import { root } from './lib/places.mjs'

runScript(async () => {
  checkNode()
  await installPackages()
  const { status } = await runChild(process.execPath, ['--import', 'tsx', 'tests/simulation/run.ts', ...process.argv.slice(2)], { cwd: root, show: true, minutesMax: 600 })
  return status
})
