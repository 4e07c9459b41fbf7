/**
 * The fit of a working curve with all its intervals and checks beside R's lm doing the same, on the same films, in one run:
 * `node --import tsx tests/bench/film.ts`.
 */
import { spawnSync } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { exposureForDepth, fitWorkingCurve, type FilmReading } from '#shared/film/index.ts'
import { randomNormal, seededRandom } from '#shared/stats/index.ts'
import type { BenchResult } from './types.ts'

const setCount = 200
const rounds = 7
const targetsMicrometres = [50, 100]
/** The fit must be this many times faster than R. */
const aim = 30

/** Six exposures of three films: what a person measures in half an hour. */
function makeSets(): FilmReading[][] {
  const random = seededRandom(2024)
  return Array.from({ length: setCount }, () =>
    [12, 18, 27, 40, 60, 90].flatMap(exposure =>
      [0, 1, 2].map((): FilmReading => ({ exposure, depthMicrometres: 95 * Math.log(exposure / 7.5) + 5 * randomNormal(random), state: 'measured' }))))
}

/** Everything R is asked for; the findings inside the fit hold lack of fit, the bend and the influence of single films. */
function answerAll(readings: readonly FilmReading[]) {
  const fit = fitWorkingCurve({ readings, exposureKind: 'mJ/cm2' })
  if (fit.kind === 'refused') throw new Error(fit.detail)
  return { fit, answers: targetsMicrometres.map(depth => exposureForDepth(fit, depth)) }
}

function secondsForAll(sets: readonly (readonly FilmReading[])[]): number {
  const start = performance.now()
  for (const readings of sets) answerAll(readings)
  return (performance.now() - start) / 1000
}

const median = (values: readonly number[]): number => values.toSorted((a, b) => a - b)[Math.floor(values.length / 2)] ?? Number.NaN

function runR(sets: readonly (readonly FilmReading[])[]): { seconds: number; numbers: readonly (readonly number[])[] } | null {
  const folder = mkdtempSync(join(tmpdir(), 'fanlight-bench-film-'))
  try {
    const file = join(folder, 'films.csv')
    const lines = sets.flatMap((readings, set) => readings.map(({ exposure, depthMicrometres }) => `${set + 1},${exposure},${depthMicrometres}`))
    writeFileSync(file, ['set,exposure,depth', ...lines].join('\n'))
    const { status, stdout, stderr, error } = spawnSync('Rscript', [fileURLToPath(new URL('film.R', import.meta.url)), file, String(rounds)], { encoding: 'utf8' })
    if (error !== undefined) return null
    if (status !== 0) throw new Error(`film.R failed: ${stderr}`)
    const [first = '', ...rest] = stdout.trim().split('\n')
    return { seconds: Number(first.trim().split(/\s+/)[1]), numbers: rest.map(line => line.trim().split(/\s+/).map(Number)) }
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}

/** Both must have answered the same questions with the same numbers, or the race means nothing. */
function checkAgreement(sets: readonly (readonly FilmReading[])[], numbers: readonly (readonly number[])[]): void {
  if (numbers.length !== sets.length) throw new Error(`R answered ${numbers.length} of ${sets.length} sets`)
  for (const [i, readings] of sets.entries()) {
    const { fit, answers } = answerAll(readings)
    const ends = (interval: (typeof answers)[number]['meanInterval']) => (interval.kind === 'finite' ? [interval.lower, interval.upper] : [Number.NaN, Number.NaN])
    const ours = [
      fit.penetrationDepthMicrometres.value, ...ends(fit.penetrationDepthMicrometres.interval),
      fit.criticalExposure.value, ...ends(fit.criticalExposure.interval), fit.residualStandardDeviation, fit.rSquared,
      ...answers.flatMap(answer => [answer.value, ...ends(answer.meanInterval), ...ends(answer.singleInterval)]),
    ]
    for (const [k, own] of ours.entries()) {
      const theirs = numbers[i]?.[k] ?? Number.NaN
      if (!(Math.abs(own / theirs - 1) < 1e-8)) throw new Error(`set ${i + 1}, number ${k + 1}: ours ${own}, R ${theirs}`)
    }
  }
}

/** @returns nothing where R is not installed: there is no yardstick then, and that is said */
export async function benchFilm(): Promise<BenchResult[]> {
  const sets = makeSets()
  for (let i = 0; i < 5; i++) secondsForAll(sets)
  const oursNow = () => (median(Array.from({ length: 5 * rounds }, () => secondsForAll(sets))) / setCount) * 1e6
  const before = oursNow()
  const theirs = runR(sets)
  if (theirs === null) {
    process.stdout.write('R (Rscript) is not installed: the film fit has no yardstick in this run.\n')
    return []
  }
  checkAgreement(sets, theirs.numbers)
  // R runs in between; the slower of ours counts, so that a busy moment of the machine is not to our credit.
  const ours = Math.max(before, oursNow())
  const yardstick = (theirs.seconds / setCount) * 1e6
  return [{
    name: 'working curve with all intervals and checks, times faster than R', ours, yardstick, unit: 'µs per fit',
    ratio: yardstick / ours, aim, higherIsBetter: true,
  }]
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  for (const { name, ours, yardstick, unit, ratio } of await benchFilm()) {
    process.stdout.write(`${name}: ${ours.toFixed(1)} against ${yardstick.toFixed(1)} ${unit}, ratio ${ratio.toFixed(0)} (aim ${aim})\n`)
  }
}
