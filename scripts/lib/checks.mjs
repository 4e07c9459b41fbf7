import { spawn } from 'node:child_process'
import { existsSync, mkdirSync, readFileSync, rmSync } from 'node:fs'
import { createRequire } from 'node:module'
import { join } from 'node:path'
import { performance } from 'node:perf_hooks'
import { enginesRefusing } from './engines.mjs'
import { root } from './install.mjs'
import { say } from './say.mjs'

const artifacts = join(root, '.artifacts')

/** Runs a program of node_modules with its output shown, and answers its exit code. */
function run(script, parameters, environment = {}) {
  return new Promise(resolve => {
    const child = spawn(process.execPath, [join(root, 'node_modules', script), ...parameters], {
      cwd: root, env: { ...process.env, ...environment }, stdio: ['ignore', 'inherit', 'inherit'],
    })
    child.once('exit', code => resolve(code ?? 1))
  })
}

/**
 * @typedef {{ passed: number, failed: number, skipped: number }} Counts
 */

/** One step that passes or fails as a whole. */
async function wholeStep(name, work) {
  const start = performance.now()
  say(`\n▸ ${name}`)
  const code = await work()
  say(`  ${code === 0 ? 'passed' : 'FAILED'} after ${((performance.now() - start) / 1000).toFixed(1)} s`)
  return { passed: code === 0 ? 1 : 0, failed: code === 0 ? 0 : 1, skipped: 0 }
}

function checkEngines() {
  const lock = JSON.parse(readFileSync(join(root, 'package-lock.json'), 'utf8'))
  const semver = createRequire(join(root, 'package.json'))('semver')
  const refusing = enginesRefusing(lock, '20.19.0', semver.satisfies)
  for (const line of refusing) say(`  ${line}`)
  const hosts = Object.values(lock.packages).filter(facts => typeof facts.resolved === 'string' && facts.resolved.startsWith('http')).length
  if (hosts > 0) say(`  the lockfile names a download address ${hosts} times`)
  return refusing.length + hosts === 0 ? 0 : 1
}

/** Lint, types and engines. */
export async function staticChecks() {
  return [
    await wholeStep('engines of all packages', checkEngines),
    await wholeStep('lint', () => run('eslint/bin/eslint.js', ['.', '--max-warnings', '0', '--cache', '--cache-location', 'node_modules/.cache/eslint/'])),
    await wholeStep('types', () => run('vue-tsc/bin/vue-tsc.js', ['--noEmit'])),
    await wholeStep('types of shared/ without browser and Node', () => run('typescript/bin/tsc', ['-p', 'shared/tsconfig.json', '--noEmit'])),
  ]
}

/**
 * Runs one vitest project (or files) and answers its counts, read from its report file.
 *
 * @param {string} project
 * @param {{ filters?: readonly string[], environment?: Record<string, string> }} options
 * @returns {Promise<Counts>}
 */
export async function testProject(project, { filters = [], environment = {} } = {}) {
  mkdirSync(artifacts, { recursive: true })
  const report = join(artifacts, `${project}-tests.json`)
  rmSync(report, { force: true })
  const start = performance.now()
  say(`\n▸ tests: ${project}`)
  const code = await run('vitest/vitest.mjs', ['run', '--project', project, '--passWithNoTests', '--reporter=default', '--reporter=json', `--outputFile.json=${report}`, ...filters], environment)
  const facts = existsSync(report) ? JSON.parse(readFileSync(report, 'utf8')) : null
  const counts = facts === null
    ? { passed: 0, failed: 1, skipped: 0 }
    : { passed: facts.numPassedTests, failed: facts.numFailedTests, skipped: facts.numPendingTests + (facts.numTodoTests ?? 0) }
  // A file that breaks before its first test counts no failed test, yet the run is red.
  if (code !== 0 && counts.failed === 0) counts.failed = 1
  say(`  ${counts.passed} passed, ${counts.failed} failed after ${((performance.now() - start) / 1000).toFixed(1)} s`)
  return counts
}

/**
 * The one closing line, and the exit code that goes with it.
 *
 * @param {readonly Counts[]} parts
 * @param {number} testsRun
 */
export function closingLine(parts, testsRun) {
  const sum = key => parts.reduce((total, part) => total + part[key], 0)
  const failed = sum('failed') + (testsRun === 0 ? 1 : 0)
  const skipped = sum('skipped')
  return {
    line: `${sum('passed')} passed, ${failed} failed${skipped > 0 ? `, ${skipped} skipped` : ''}`,
    code: failed === 0 ? 0 : 1,
  }
}
