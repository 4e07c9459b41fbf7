/**
 * Prints coverage and width of every interval shown to a person: `node --import tsx tests/simulation/run.ts [section ...]
 * [--sets 3000] [--seed 1]`. Each section is a table that lands as soon as it is done.
 */
import { parseArgs } from 'node:util'
import { seededRandom, type RandomSource } from '#shared/stats/index.ts'
import { reportFilmCurves } from './film-curves-coverage.ts'
import { reportFilmLines } from './film-lines-coverage.ts'
import { reportFilm } from './film-report.ts'
import { reportGraded, reportPlanner, reportWindow } from './window-report.ts'

type Report = (options: { sets: number; random: RandomSource; print: (text: string) => void }) => void

/** One line per part of the product; each part brings its own report. */
const sections: Readonly<Record<string, Report>> = {
  film: reportFilm,
  'film-curves': reportFilmCurves,
  'film-lines': reportFilmLines,
  window: reportWindow,
  graded: reportGraded,
  planner: reportPlanner,
}

const { values, positionals } = parseArgs({
  allowPositionals: true,
  options: { sets: { type: 'string', default: '3000' }, seed: { type: 'string', default: '1' } },
})
const sets = Number(values.sets)
const seed = Number(values.seed)
if (!Number.isInteger(sets) || sets < 1 || !Number.isInteger(seed))
  throw new Error('--sets and --seed take whole numbers')
const unknown = positionals.filter(name => !(name in sections))
if (unknown.length > 0)
  throw new Error(`no section ${unknown.join(', ')}; there are: ${Object.keys(sections).join(', ')}`)

const print = (text: string): void => void process.stdout.write(`${text}\n`)
const started = performance.now()
print(`${sets} data sets per row, seed ${seed}`)
for (const [name, report] of Object.entries(sections)) {
  if (positionals.length > 0 && !positionals.includes(name)) continue
  report({ sets, random: seededRandom(seed), print })
}
print(`\n${((performance.now() - started) / 1000).toFixed(1)} s`)
