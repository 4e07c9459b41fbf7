// npm run check: the quick part of npm test, without PostgreSQL and browser.
import { closingLine, staticChecks, testProject } from './lib/checks.mjs'
import { checkNode, installPackages } from './lib/install.mjs'
import { say } from './lib/say.mjs'

checkNode()
await installPackages()
const parts = await staticChecks()
let testsRun = 0
for (const project of ['unit', 'client', 'reference', 'simulation']) {
  const counts = await testProject(project)
  parts.push(counts)
  testsRun += counts.passed + counts.failed
}
const { line, code } = closingLine(parts, testsRun)
say(`\n${line}`)
process.exit(code)
