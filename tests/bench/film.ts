import { spawnSync } from 'node:child_process'
import { exposureForDepth, fitWorkingCurve, type FilmReading } from '#shared/film/index.ts'

/** Runs of each; they take turns, so that a busy moment of the machine falls on both. */
const rounds = 5
const fitsEach = { ours: 5000, yardstick: 400 }

const exposuresOf = (films: number) => Array.from({ length: films }, (_, i) => 2 * 8 ** (i / (films - 1)))
const depthsOf = (films: number) =>
  exposuresOf(films).map((exposure, i) => 100 * Math.log(exposure) + 7 * Math.sin(i * 12.9898))

/** R's own line with the same answers: coefficients, covariance, intervals, influence. */
const yardstick = (films: number) => `
E <- c(${exposuresOf(films).join(',')}); C <- c(${depthsOf(films).join(',')})
once <- function() { m <- lm(C ~ log(E)); vcov(m); confint(m); rstudent(m); cooks.distance(m); coef(m)[[2]] }
for (i in 1:50) once()
cat((system.time(for (i in 1:${fitsEach.yardstick}) once())[["elapsed"]]) / ${fitsEach.yardstick} * 1e6, sprintf("%.12g", once()))`

function microsecondsOurs(films: number): { microseconds: number; slope: number } {
  const depths = depthsOf(films)
  const readings = exposuresOf(films).map((exposure, i): FilmReading => ({
    exposure,
    depthMicrometres: depths[i] ?? 0,
    state: 'measured',
  }))
  let slope = 0
  const start = performance.now()
  for (let i = 0; i < fitsEach.ours; i++) {
    const fit = fitWorkingCurve({ readings, exposureKind: 'seconds' })
    if (fit.kind !== 'fitted') throw new Error(fit.detail)
    exposureForDepth(fit, 100)
    slope = fit.penetrationDepthMicrometres.value
  }
  return { microseconds: ((performance.now() - start) * 1000) / fitsEach.ours, slope }
}

const median = (values: readonly number[]): number =>
  [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)] ?? 0

/**
 * A working curve with all its intervals and checks against R's `lm` with covariance, intervals and influence, per fit.
 *
 * @returns `yardstickMicroseconds` null where R is not installed; both must agree on the slope
 */
export function benchFilm(films = 8): {
  films: number
  microseconds: number
  yardstickMicroseconds: number | null
  ratio: number | null
} {
  microsecondsOurs(films) // lets the compiler finish before the clock starts
  const ours: number[] = []
  const theirs: number[] = []
  for (let round = 0; round < rounds; round++) {
    const { microseconds, slope } = microsecondsOurs(films)
    ours.push(microseconds)
    const { status, stdout } = spawnSync('Rscript', ['--vanilla', '-e', yardstick(films)], {
      encoding: 'utf8',
    })
    if (status !== 0) return { films, microseconds: median(ours), yardstickMicroseconds: null, ratio: null }
    const [time = 0, theirSlope = 0] = stdout.trim().split(/\s+/).map(Number)
    if (Math.abs(theirSlope / slope - 1) > 1e-9) throw new Error(`R has the slope ${theirSlope}, we ${slope}`)
    theirs.push(time)
  }
  return {
    films,
    microseconds: median(ours),
    yardstickMicroseconds: median(theirs),
    ratio: median(theirs) / median(ours),
  }
}
