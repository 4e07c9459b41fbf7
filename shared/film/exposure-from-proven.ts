import { moverSum, negate, type Ranged } from '../stats/mover.ts'
import { StatsError, type Interval } from '../stats/types.ts'
import { depthAt } from './depth-at.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import { checkLayerHeight, completeRule, type CompleteRule, type LayerRuleChoice } from './layer-rules.ts'
import type { WorkingCurveFit } from './types.ts'

export interface ExposureFromProven {
  readonly rule: CompleteRule
  readonly value: number
  readonly interval: Interval
  /** New exposure over proven exposure. */
  readonly factor: number
  /** True where Dp is small against the change of height: then a print must decide. */
  readonly printMustDecide: boolean
  readonly sentence: string
}

/** Beyond this change of height in units of Dp the interval is wide and the rule itself decides (simulation). */
const heightChangeMax = 0.6
/** Upper end over lower end: a wider interval spans so many printer steps that only a print can choose. */
const intervalRatioMax = 1.5
/** The usual printer step, in seconds. Common practice, no published source. */
const usualStepSeconds = 0.1

/**
 * Scales a proven exposure to another layer height.
 *
 * constant-overcure: t2 = t1 · exp(Δh/Dp). constant-ratio: t2 = t1 · exp(ρ Δh/Dp), ρ the cure ratio of the proven
 * exposure by the film curve, which makes it t1 · (t1/tc)^(Δh/h1). far-side-dose: t2 = t1 · (exp(h2/Dp) − 1)/(exp(h1/Dp) − 1).
 * The interval joins the proven step's half-width and the exact t interval of Dp (or Fieller's of tc) by MOVER: 95 to
 * 98 % coverage (`npm run simulate`). No interval covers the choice of the rule.
 *
 * @param options.rule - by name, or with its value; a ratio that is given is taken as exact
 * @param options.provenStepSeconds - printer step at which the exposure was proven: the true one is taken to lie within half
 *   a step either way (@default 0.1, at most the exposure itself)
 * @throws {StatsError} `exposure-out-of-range`, `layer-height-out-of-range`, `rule-out-of-range`
 * @example
 * exposureFromProven({ provenSeconds: 2, provenLayerHeightMicrometres: 50, layerHeightMicrometres: 25, fit, rule: 'constant-overcure' })
 */
export function exposureFromProven(options: {
  readonly provenSeconds: number
  readonly provenLayerHeightMicrometres: number
  readonly layerHeightMicrometres: number
  readonly fit: WorkingCurveFit
  readonly rule: LayerRuleChoice
  readonly provenStepSeconds?: number
}): ExposureFromProven {
  const { provenSeconds, provenLayerHeightMicrometres: h1, layerHeightMicrometres: h2, fit } = options
  if (!(provenSeconds > 0 && Number.isFinite(provenSeconds))) {
    throw new StatsError('exposure-out-of-range', `provenSeconds must be above zero, got ${provenSeconds}`)
  }
  const { provenStepSeconds = Math.min(usualStepSeconds, provenSeconds) } = options
  if (!(provenStepSeconds >= 0 && provenStepSeconds < 2 * provenSeconds)) {
    throw new StatsError(
      'exposure-out-of-range',
      `provenStepSeconds must be from 0 to twice the exposure, got ${provenStepSeconds}`,
    )
  }
  checkLayerHeight(h1)
  checkLayerHeight(h2)
  const proven: Ranged = {
    value: Math.log(provenSeconds),
    interval: {
      kind: 'finite',
      lower: Math.log(provenSeconds - provenStepSeconds / 2),
      upper: Math.log(provenSeconds + provenStepSeconds / 2),
    },
  }
  const { rule, scaled } = scale({ proven, provenSeconds, h1, h2, fit, rule: options.rule })
  const interval = exponentiate(scaled.interval)
  const change =
    ((rule.kind === 'constant-ratio' ? rule.ratio : 1) * Math.abs(h2 - h1)) /
    fit.penetrationDepthMicrometres.value
  const doubt = doubtOf({ rule, interval, change })
  return {
    rule,
    value: Math.exp(scaled.value),
    interval,
    factor: Math.exp(scaled.value - proven.value),
    printMustDecide: doubt !== null,
    sentence: doubt ?? 'The change of height is small against Dp: a good start. Confirm it with one print.',
  }
}

/** ln of the new exposure with its interval, and the rule with its value. */
function scale(parts: {
  proven: Ranged
  provenSeconds: number
  h1: number
  h2: number
  fit: WorkingCurveFit
  rule: LayerRuleChoice
}): { rule: CompleteRule; scaled: Ranged } {
  const { proven, h1, h2, fit } = parts
  const named = completeRule(parts.rule)
  const given =
    typeof parts.rule !== 'string' && parts.rule.kind === 'constant-ratio' && parts.rule.ratio !== undefined
  // The cure ratio is that of the proven exposure by the films, not a rule of thumb; only films in seconds can tell it.
  if (named.kind === 'constant-ratio' && !given && fit.exposureKind === 'seconds') {
    const ratio = Math.max(0, depthAt(fit, parts.provenSeconds).depthMicrometres) / h1
    const share = (h2 - h1) / h1
    const critical: Ranged = {
      value: Math.log(fit.criticalExposure.value),
      interval: logInterval(fit.criticalExposure.interval),
    }
    // ln t2 = ln t1 + share · (ln t1 − ln tc); an exposure below tc has nothing to scale.
    const scaled =
      ratio > 0
        ? combined([
            [1 + share, proven],
            [-share, critical],
          ])
        : { value: proven.value, interval: { kind: 'unbounded' as const } }
    return { rule: { ...named, ratio }, scaled }
  }
  const logFactor = (depth: number): number => {
    if (named.kind === 'constant-overcure') return (h2 - h1) / depth
    if (named.kind === 'constant-ratio') return (named.ratio * (h2 - h1)) / depth
    return (h2 - h1) / depth + Math.log(Math.expm1(-h2 / depth) / Math.expm1(-h1 / depth))
  }
  const dp = fit.penetrationDepthMicrometres
  let interval: Interval = { kind: 'unbounded' }
  // Each factor moves one way with Dp, so the ends of Dp give the ends of the factor.
  if (dp.interval.kind === 'finite' && dp.interval.lower > 0) {
    const ends = [logFactor(dp.interval.lower), logFactor(dp.interval.upper)]
    interval = { kind: 'finite', lower: Math.min(...ends), upper: Math.max(...ends) }
  }
  return {
    rule: named,
    scaled: combined([
      [1, proven],
      [1, { value: logFactor(dp.value), interval }],
    ]),
  }
}

const logInterval = (interval: Interval): Interval =>
  interval.kind === 'finite'
    ? { kind: 'finite', lower: Math.log(interval.lower), upper: Math.log(interval.upper) }
    : { kind: 'unbounded' }

/** Sum of multiples of independent estimates. */
function combined(terms: readonly (readonly [number, Ranged])[]): Ranged {
  const parts = terms.map(([factor, part]) => {
    const size = Math.abs(factor)
    const { interval } = part
    const grown: Ranged = {
      value: part.value * size,
      interval:
        interval.kind === 'finite'
          ? { kind: 'finite', lower: interval.lower * size, upper: interval.upper * size }
          : interval,
    }
    return factor < 0 ? negate(grown) : grown
  })
  return { value: parts.reduce((sum, part) => sum + part.value, 0), interval: moverSum(parts) }
}

function doubtOf(answer: { rule: CompleteRule; interval: Interval; change: number }): string | null {
  const { rule, interval, change } = answer
  if (rule.kind === 'constant-ratio' && rule.ratio < 1) {
    return 'By the film curve the proven exposure does not even cure through its own layer: films and prints disagree. Use the answer only as a start and let a print decide.'
  }
  if (interval.kind !== 'finite') {
    return 'The films do not tell Dp well enough to scale by it. Use the answer only as a start and let a print decide.'
  }
  if (change > heightChangeMax) {
    return `The change of height is ${change.toFixed(1)} times Dp: too far to trust the formula. Use it as a start and let a print decide.`
  }
  if (interval.upper > intervalRatioMax * interval.lower) {
    return 'The interval spans too many printer steps to choose one. Use the answer as a start and let a print decide.'
  }
  return null
}
