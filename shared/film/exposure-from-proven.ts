import { moverSum, type Ranged } from '../stats/mover.ts'
import { StatsError, type Interval } from '../stats/types.ts'
import { depthAt } from './depth-at.ts'
import { exponentiate } from './exponentiate.ts'
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

/** Beyond this change of height in units of Dp, the interval is wide and the rule itself decides (simulation). */
const heightChangeMax = 0.6

/**
 * Scales a proven exposure to another layer height.
 *
 * constant-overcure: t2 = t1 · exp(Δh/Dp). constant-ratio: t2 = t1 · exp(ρ Δh/Dp), ρ the cure ratio of the proven
 * exposure by the film curve. far-side-dose: t2 = t1 · (exp(h2/Dp) − 1)/(exp(h1/Dp) − 1). The interval joins the
 * proven step's half-width and the exact t interval of Dp by MOVER: 95 to 97 % coverage (`npm run simulate`). No
 * interval covers the choice of the rule.
 *
 * @param options.provenStepSeconds - printer step at which the exposure was proven; half of it either way is open (@default 0)
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
  const { provenSeconds, provenLayerHeightMicrometres: h1, layerHeightMicrometres: h2, fit, provenStepSeconds = 0 } = options
  if (!(provenSeconds > 0 && Number.isFinite(provenSeconds))) {
    throw new StatsError('exposure-out-of-range', `provenSeconds must be above zero, got ${provenSeconds}`)
  }
  if (!(provenStepSeconds >= 0 && provenStepSeconds < 2 * provenSeconds)) {
    throw new StatsError('exposure-out-of-range', `provenStepSeconds must be from 0 to twice the exposure, got ${provenStepSeconds}`)
  }
  checkLayerHeight(h1)
  checkLayerHeight(h2)
  const named = completeRule(options.rule)
  // The cure ratio is that of the proven exposure, not a rule of thumb, unless the caller gave one.
  const given = typeof options.rule !== 'string' && options.rule.kind === 'constant-ratio' && options.rule.ratio !== undefined
  const rule = named.kind === 'constant-ratio' && !given ? { ...named, ratio: Math.max(0, depthAt(fit, provenSeconds).depthMicrometres) / h1 } : named

  const dp = fit.penetrationDepthMicrometres
  const logFactor = (depth: number): number => {
    if (rule.kind === 'constant-overcure') return (h2 - h1) / depth
    if (rule.kind === 'constant-ratio') return (rule.ratio * (h2 - h1)) / depth
    return Math.log(Math.expm1(h2 / depth) / Math.expm1(h1 / depth))
  }
  const value = logFactor(dp.value)
  let interval: Interval = { kind: 'unbounded' }
  if (dp.interval.kind === 'finite' && dp.interval.lower > 0) {
    const ends = [logFactor(dp.interval.lower), logFactor(dp.interval.upper)]
    interval = { kind: 'finite', lower: Math.min(...ends), upper: Math.max(...ends) }
  }
  const proven: Ranged = {
    value: Math.log(provenSeconds),
    interval: {
      kind: 'finite',
      lower: Math.log(provenSeconds - provenStepSeconds / 2),
      upper: Math.log(provenSeconds + provenStepSeconds / 2),
    },
  }
  const sum = moverSum([proven, { value, interval }])
  const printMustDecide = sum.kind !== 'finite' || Math.abs(h2 - h1) / dp.value > heightChangeMax
  return {
    rule,
    value: provenSeconds * Math.exp(value),
    interval: exponentiate(sum),
    factor: Math.exp(value),
    printMustDecide,
    sentence: printMustDecide
      ? `The change of height is ${(Math.abs(h2 - h1) / dp.value).toFixed(1)} times Dp: too far to trust the formula. Use it as a start and let a print decide.`
      : 'The change of height is small against Dp: a good start. Confirm it with one print.',
  }
}
