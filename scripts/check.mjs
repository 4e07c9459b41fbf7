// npm run check: the quick part of npm test, without PostgreSQL and browser.
import { staticChecks, testProject } from './lib/checks.mjs'
import { runScript } from './lib/closing.mjs'
import { closingLine } from './lib/counts.mjs'
import { checkNode, installPackages } from './lib/install.mjs'
import { say } from './lib/say.mjs'
import { heavyProjects, projects } from './lib/test-files.mjs'

runScript(async () => {
  checkNode()
  await installPackages()
  const steps = await staticChecks()
  const tests = []
  for (const project of projects.filter(name => !heavyProjects.includes(name))) tests.push(await testProject(project))
  const { line, code } = closingLine(steps, tests)
  say(`\n${line}`)
  return code
})
