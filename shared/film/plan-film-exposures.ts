import { tQuantile } from '../stats/quantiles.ts'
import { StatsError } from '../stats/types.ts'

export interface FilmPlan {
  /** On the printer's step, in the order to expose them. */
  readonly exposures: readonly number[]
  readonly basis: 'expected-exposure' | 'nothing-known'
  /** Standard error of ln exposure at the target that these films should give; null where nothing is known. */
  readonly expectedStandardErrorLog: number | null
  /** Half-width of the interval at the target as a factor: 1.2 means "within a factor of 1.2". */
  readonly expectedFactor: number | null
  readonly gauge: GaugeVerdict
  /** What to expect of these films, and what the printer's step or range did to the plan. */
  readonly sentence: string
}

export interface GaugeVerdict {
  readonly kind: 'good-enough' | 'limits-the-answer' | 'too-coarse' | 'not-stated'
  readonly sentence: string
}

/**
 * Multiples of the expected exposure: half of the films at or just below the target, the rest up to four times. Narrow
 * for the answer, safe against a bend (chosen by simulation; six films).
 */
const aroundTarget = [0.8, 0.8, 1, 1.4, 2.5, 4]
/** Scatter of films and typical Dp where the shop has no figures of its own. */
const filmSpreadDefaultMicrometres = 20
const penetrationDepthDefaultMicrometres = 120

function multiples(films: number): number[] {
  if (films === 6) return aroundTarget
  const low = Math.ceil(films / 2)
  const near = [0.8, 1, 0.8, 0.9]
  const lower = Array.from({ length: low }, (_, i) => near[i % near.length] ?? 1)
  const upperCount = films - low
  // Geometric from 1.4 to 4; a single upper film goes where slope and safety balance.
  const upper = Array.from({ length: upperCount }, (_, i) =>
    upperCount === 1 ? 2.5 : 1.4 * (4 / 1.4) ** (i / (upperCount - 1)),
  )
  return [...lower, ...upper]
}

function onStep(exposure: number, stepSeconds: number, min: number, max: number): number {
  const bounded = Math.min(max, Math.max(min, exposure))
  const step = Math.max(1, Math.round(bounded / stepSeconds))
  return Number((step * stepSeconds).toPrecision(12))
}

function shuffled(values: readonly number[], random: () => number): number[] {
  const order = [...values]
  for (let i = order.length - 1; i > 0; i--) {
    const j = Math.floor(random() * (i + 1))
    const [a, b] = [order[i] ?? 0, order[j] ?? 0]
    order[i] = b
    order[j] = a
  }
  return order
}

/**
 * Which films to print for a target depth.
 *
 * With an expected exposure: about 0.8, 0.8, 1, 1.4, 2.5, 4 times it. With nothing known: a wide geometric set. All on
 * the printer's step, in random order, so that drift and plate position do not pose as dose.
 *
 * @param options.expectedExposureAtTarget - exposure expected to give the target depth; null when nothing is known
 * @param options.films - how many, 3 to 100 (@default 6)
 * @param options.stepSeconds - printer step, in the unit of the exposures
 * @param options.random - uniform source for the order
 * @param options.usualExposure - with nothing known: the exposure that layers get today (@default 2)
 * @param options.penetrationDepthMicrometres - where known, for the expected precision
 * @param options.filmSpreadMicrometres - scatter of films of one exposure, where known
 * @param options.gaugeRepeatabilityMicrometres - one standard deviation of the caliper
 * @throws {StatsError} `films-out-of-range`, `exposure-out-of-range`
 * @example
 * planFilmExposures({ expectedExposureAtTarget: 2, films: 6, stepSeconds: 0.1, random: Math.random })
 */
export function planFilmExposures(options: {
  readonly expectedExposureAtTarget: number | null
  readonly films?: number
  readonly stepSeconds: number
  readonly random: () => number
  readonly usualExposure?: number
  readonly exposureMin?: number
  readonly exposureMax?: number
  readonly penetrationDepthMicrometres?: number
  readonly filmSpreadMicrometres?: number
  readonly gaugeRepeatabilityMicrometres?: number | null
  readonly confidenceLevel?: number
}): FilmPlan {
  const { expectedExposureAtTarget: expected, films = 6, stepSeconds, usualExposure = 2 } = options
  if (!Number.isInteger(films) || films < 3 || films > 100)
    throw new StatsError('films-out-of-range', `films must be a whole number from 3 to 100, got ${films}`)
  for (const [name, value] of [
    ['expectedExposureAtTarget', expected ?? 1],
    ['stepSeconds', stepSeconds],
    ['usualExposure', usualExposure],
  ] as const) {
    if (!(value > 0 && Number.isFinite(value)))
      throw new StatsError('exposure-out-of-range', `${name} must be above zero, got ${value}`)
  }
  const { exposureMin = stepSeconds, exposureMax = Infinity } = options
  // Nothing known: 1.5 to 12 times the critical exposure, taken as a quarter of what layers get today.
  const wanted =
    expected === null
      ? Array.from({ length: films }, (_, i) => (usualExposure / 4) * 1.5 * 8 ** (i / (films - 1)))
      : multiples(films).map(multiple => multiple * expected)
  const exposures = wanted.map(exposure => onStep(exposure, stepSeconds, exposureMin, exposureMax))
  const precision = expected === null ? null : expectedPrecision(exposures, expected, options)
  return {
    exposures: shuffled(exposures, options.random),
    basis: expected === null ? 'nothing-known' : 'expected-exposure',
    expectedStandardErrorLog: precision?.standardErrorLog ?? null,
    expectedFactor: precision?.factor ?? null,
    gauge: judgeGauge(options),
    sentence: planSentence(exposures, precision),
  }
}

function planSentence(exposures: readonly number[], precision: { factor: number } | null): string {
  const levels = new Set(exposures).size
  const parts: string[] = []
  if (levels < 2)
    parts.push(
      'On this step and range all films get one exposure: no curve can come of it. Use a finer step, or a resin or layer that needs longer.',
    )
  else if (levels < 4)
    parts.push(
      `On this step and range only ${levels} different exposures remain: enough for a line, not to see a bend.`,
    )
  if (precision === null && levels >= 2)
    parts.push('A wide set, to find the curve at all. Plan again around the target once these are measured.')
  if (precision !== null) {
    parts.push(
      precision.factor < 10
        ? `Expect the exposure for the target within a factor of ${precision.factor.toFixed(2)} at the confidence level, if films scatter as stated or usual.`
        : 'These films will hardly tell the exposure for the target: add films, or spread them further.',
    )
  }
  return parts.join(' ')
}

/** SE(ln E) = (σ / Dp) · √(1/n + (x₀ − x̄)² / Sxx), of the design as it will be printed. */
function expectedPrecision(
  exposures: readonly number[],
  expected: number,
  options: {
    readonly penetrationDepthMicrometres?: number
    readonly filmSpreadMicrometres?: number
    readonly confidenceLevel?: number
  },
): { standardErrorLog: number; factor: number } | null {
  const depth = options.penetrationDepthMicrometres ?? penetrationDepthDefaultMicrometres
  const spread = options.filmSpreadMicrometres ?? filmSpreadDefaultMicrometres
  const x = exposures.map(Math.log)
  const mean = x.reduce((a, b) => a + b, 0) / x.length
  const squares = x.reduce((sum, value) => sum + (value - mean) ** 2, 0)
  if (!(squares > 0)) return null
  const standardErrorLog =
    (spread / depth) * Math.sqrt(1 / x.length + (Math.log(expected) - mean) ** 2 / squares)
  const quantile = tQuantile(0.5 + (options.confidenceLevel ?? 0.95) / 2, x.length - 2)
  return { standardErrorLog, factor: Math.exp(quantile * standardErrorLog) }
}

/**
 * Whether the caliper is good enough: its repeatability as a share of Dp is the error of ln exposure that one film
 * carries from the gauge alone. Limits chosen from the design table (six films): 3 % needs about 10 µm at Dp 100 µm.
 */
function judgeGauge(options: {
  readonly gaugeRepeatabilityMicrometres?: number | null
  readonly penetrationDepthMicrometres?: number
}): GaugeVerdict {
  const repeatability = options.gaugeRepeatabilityMicrometres ?? null
  if (repeatability === null) {
    return {
      kind: 'not-stated',
      sentence:
        'How well the caliper repeats is not stated. Measure one film ten times: the standard deviation is its repeatability.',
    }
  }
  const depth = options.penetrationDepthMicrometres ?? penetrationDepthDefaultMicrometres
  const share = repeatability / depth
  const percent = `${(100 * share).toFixed(share < 0.1 ? 1 : 0)} %`
  if (share <= 0.08)
    return {
      kind: 'good-enough',
      sentence: `The caliper is good enough: its repeatability of ${repeatability} µm moves the exposure of one film by ${percent}.`,
    }
  if (share <= 0.2)
    return {
      kind: 'limits-the-answer',
      sentence: `The caliper limits the answer: its repeatability of ${repeatability} µm moves the exposure of one film by ${percent}. Read each film three times, or use a finer gauge.`,
    }
  return {
    kind: 'too-coarse',
    sentence: `The caliper is too coarse for this resin: its repeatability of ${repeatability} µm moves the exposure of one film by ${percent}. A finer gauge will help more than more films.`,
  }
}
