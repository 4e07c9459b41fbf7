// npm test: installs what is missing, starts a throw-away PostgreSQL, runs everything, ends with one line of counts.
// npm test -- tests/api/printers   runs only what matches, without lint and types; options such as -t go to vitest.
import { buildClient } from './lib/build-client.mjs'
import { staticChecks, testProject } from './lib/checks.mjs'
import { ClosingError, isClosing, runScript } from './lib/closing.mjs'
import { closingLine } from './lib/counts.mjs'
import { checkNode, findChromium, installChromium, installPackages, installPostgres } from './lib/install.mjs'
import { say } from './lib/say.mjs'
import { chooseProjects, heavyProjects, testFiles } from './lib/test-files.mjs'
import { startThrowAwayCluster } from './lib/throw-away-cluster.mjs'

const words = process.argv.slice(2)

async function runAll() {
  checkNode()
  const chosen = chooseProjects(words, testFiles())
  if (chosen.unknown.length > 0) throw new Error(`No test file's path holds "${chosen.unknown.join('", "')}".`)
  await installPackages()
  const steps = words.length === 0 ? await staticChecks() : []
  const tests = []
  for (const project of chosen.projects.filter(name => !heavyProjects.includes(name))) tests.push(await testProject(project, { words }))

  const heavy = chosen.projects.filter(name => heavyProjects.includes(name))
  if (heavy.length > 0) {
    await installPostgres()
    if (heavy.includes('browser')) {
      await installChromium()
      await buildClient()
    }
    const cluster = await startThrowAwayCluster()
    const environment = { TEST_DATABASE_URL: cluster.url, CHROMIUM_PATH: findChromium() ?? '' }
    for (const project of heavy) tests.push(await testProject(project, { words, environment }))
  }
  return closingLine(steps, tests)
}

runScript(async () => {
  try {
    const { line, code } = await runAll()
    say(`\n${line}`)
    return code
  } catch (error) {
    if (error instanceof ClosingError || isClosing()) throw error
    process.stderr.write(`\n${error.message}\n`)
    say('\n0 passed, 1 failed')
    return 1
  }
})
