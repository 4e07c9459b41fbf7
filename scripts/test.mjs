// npm test: installs what is missing, starts a throw-away PostgreSQL, runs everything, ends with one line of counts.
// npm test -- tests/api/printers   runs only what matches, without lint and types.
import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { buildClient } from './lib/build-client.mjs'
import { closingLine, staticChecks, testProject } from './lib/checks.mjs'
import { checkNode, findChromium, installChromium, installPackages, installPostgres } from './lib/install.mjs'
import { say } from './lib/say.mjs'
import { startThrowAwayCluster } from './lib/throw-away-cluster.mjs'

const filters = process.argv.slice(2)
const quickProjects = ['unit', 'client', 'reference', 'simulation']
const heavyProjects = ['api', 'browser']

const touches = (project, filter) => (project === 'client' ? filter.includes('unit/src') || !filter.includes('unit/') : filter.includes(`tests/${project}`) || !filter.includes('tests/'))
const wanted = project => filters.length === 0 || filters.some(filter => touches(project, filter))

async function main() {
  checkNode()
  await installPackages()
  const parts = filters.length === 0 ? await staticChecks() : []
  let testsRun = 0
  const add = counts => {
    parts.push(counts)
    testsRun += counts.passed + counts.failed
  }
  for (const project of quickProjects.filter(wanted)) add(await testProject(project, { filters }))
  const heavy = heavyProjects.filter(wanted)
  if (heavy.length > 0) {
    await installPostgres()
    if (heavy.includes('browser')) {
      await installChromium()
      await buildClient()
    }
    const cluster = await startThrowAwayCluster(mkdtempSync(join(tmpdir(), 'fanlight-test-')))
    try {
      for (const project of heavy) {
        add(await testProject(project, { filters, environment: { TEST_DATABASE_URL: cluster.url, CHROMIUM_PATH: findChromium() ?? '' } }))
      }
    } finally {
      cluster.remove()
    }
  }
  return closingLine(parts, testsRun)
}

main().then(({ line, code }) => {
  say(`\n${line}`)
  process.exit(code)
}).catch(error => {
  process.stderr.write(`\n${error.stack}\n`)
  say('\n0 passed, 1 failed')
  process.exit(1)
})
