import { existsSync, mkdirSync, readFileSync, rmSync } from 'node:fs'
import { createRequire } from 'node:module'
import { join } from 'node:path'
import { performance } from 'node:perf_hooks'
import { runChild } from './closing.mjs'
import { countsOf } from './counts.mjs'
import { enginesRefusing } from './engines.mjs'
import { artifactsFolder, root } from './places.mjs'
import { say } from './say.mjs'

/** Oldest Node that package.json admits. */
const oldestNode = '20.19.0'

/** Runs a program of node_modules with its output shown. */
async function run(script, parameters, options = {}) {
  const { status } = await runChild(process.execPath, [join(root, 'node_modules', script), ...parameters], { cwd: root, show: true, minutesMax: 25, ...options })
  return status
}

/** Says the name before, the outcome and the seconds after; and every half minute that it is still at work. */
async function timed(name, work, outcome) {
  const start = performance.now()
  const seconds = () => ((performance.now() - start) / 1000).toFixed(1)
  say(`\n▸ ${name}`)
  const timer = setInterval(() => say(`  … ${name}: ${Math.round(Number(seconds()))} s so far`), 30_000)
  try {
    const result = await work()
    say(`  ${name}: ${outcome(result)} after ${seconds()} s`)
    return result
  } finally {
    clearInterval(timer)
  }
}

/** One step that passes or fails as a whole. */
async function wholeStep(name, work) {
  const code = await timed(name, work, status => (status === 0 ? 'passed' : 'FAILED'))
  return { passed: code === 0 ? 1 : 0, failed: code === 0 ? 0 : 1, skipped: 0 }
}

function checkLockfile() {
  const lock = JSON.parse(readFileSync(join(root, 'package-lock.json'), 'utf8'))
  // In the lockfile since several tools of ours stand on it.
  const semver = createRequire(join(root, 'package.json'))('semver')
  const refusing = enginesRefusing(lock, oldestNode, semver.satisfies)
  for (const line of refusing) say(`  ${line}`)
  const addresses = Object.values(lock.packages).filter(facts => typeof facts.resolved === 'string' && facts.resolved.startsWith('http')).length
  if (addresses > 0) say(`  the lockfile names a download address ${addresses} times: .npmrc's omit-lockfile-registry-resolved was not heeded`)
  return refusing.length + addresses === 0 ? 0 : 1
}

/** Lockfile, lint and types. */
export async function staticChecks() {
  return [
    await wholeStep(`all packages run on Node ${oldestNode}`, async () => checkLockfile()),
    await wholeStep('lint', () => run('eslint/bin/eslint.js', ['.', '--max-warnings', '0', '--cache', '--cache-location', 'node_modules/.cache/eslint/'])),
    await wholeStep('types', () => run('vue-tsc/bin/vue-tsc.js', ['--noEmit'])),
    await wholeStep('types of shared/ without browser and Node', () => run('typescript/bin/tsc', ['-p', 'shared/tsconfig.json', '--noEmit'])),
  ]
}

/**
 * Runs one vitest project and answers its counts, read from its report file.
 *
 * @param {string} project
 * @param {{ words?: readonly string[], environment?: Record<string, string> }} [options] words:
 *   filters and options for vitest
 * @returns {Promise<import('./counts.mjs').Counts>}
 */
export async function testProject(project, { words = [], environment = {} } = {}) {
  mkdirSync(artifactsFolder, { recursive: true })
  // A name of its own: two runs from one checkout must not read each other's report.
  const report = join(artifactsFolder, `report-${project}-${process.pid}.json`)
  try {
    return await timed(`tests: ${project}`, async () => {
      const code = await run('vitest/vitest.mjs', ['run', '--project', project, '--passWithNoTests', '--reporter=default', '--reporter=json', `--outputFile.json=${report}`, ...words], {
        env: { ...process.env, ...environment },
      })
      return countsOf(code, existsSync(report) ? JSON.parse(readFileSync(report, 'utf8')) : null)
    }, counts => `${counts.passed} passed, ${counts.failed} failed`)
  } finally {
    rmSync(report, { force: true })
  }
}
