import { tQuantile } from '../stats/quantiles.ts'
import type { Interval } from '../stats/types.ts'
import { exponentiate } from './exponentiate.ts'
import { exposureForDepth } from './exposure-for-depth.ts'
import { checkLayerHeight, completeRule, type CompleteRule, type LayerRuleChoice } from './layer-rules.ts'
import type { WorkingCurveFit } from './types.ts'

export interface ExposureForLayer {
  readonly rule: CompleteRule
  readonly layerHeightMicrometres: number
  readonly value: number
  readonly meanInterval: Interval
  /** For one new film of the target depth; as the mean where the rule has no target depth of its own. */
  readonly singleInterval: Interval
  /** Cured depth that one exposure of this value makes. */
  readonly depthMicrometres: number
  readonly extrapolated: boolean
}

/**
 * The exposure for a layer height by one rule.
 *
 * constant-overcure: cure `overcureMicrometres` beyond the layer. constant-ratio: cure `ratio` times the layer.
 * far-side-dose: the dose at the far side of a layer, summed over all layers that shine through it, is `doseRatio`
 * times the critical one: E = doseRatio · Ec · (exp(L/Dp) − 1), from the geometric series of exponential attenuation.
 *
 * @throws {StatsError} `layer-height-out-of-range`, `rule-out-of-range`
 * @example
 * exposureForLayer(fit, { layerHeightMicrometres: 50, rule: { kind: 'constant-overcure', overcureMicrometres: 40 } }).value
 */
export function exposureForLayer(
  fit: WorkingCurveFit,
  options: { readonly layerHeightMicrometres: number; readonly rule: LayerRuleChoice },
): ExposureForLayer {
  const { layerHeightMicrometres } = options
  checkLayerHeight(layerHeightMicrometres)
  const rule = completeRule(options.rule)
  if (rule.kind === 'far-side-dose') return farSideDose(fit, layerHeightMicrometres, rule)
  const depth = rule.kind === 'constant-overcure' ? layerHeightMicrometres + rule.overcureMicrometres : layerHeightMicrometres * rule.ratio
  return { rule, layerHeightMicrometres, ...exposureForDepth(fit, depth) }
}

function farSideDose(
  fit: WorkingCurveFit,
  layerHeightMicrometres: number,
  rule: Extract<CompleteRule, { kind: 'far-side-dose' }>,
): ExposureForLayer {
  const { meanLogExposure, meanDepthMicrometres, sumSquaresLogExposure, sumWeights } = fit.centre
  const slope = fit.penetrationDepthMicrometres.value
  const layers = layerHeightMicrometres / slope
  const logValue = meanLogExposure - meanDepthMicrometres / slope + Math.log(rule.doseRatio) + Math.log(Math.expm1(layers))
  // d ln E / d slope; the centre's depth and the slope are uncorrelated, so two terms make the variance.
  const bySlope = meanDepthMicrometres / slope ** 2 - (layers / slope) / -Math.expm1(-layers)
  const variance = fit.residualStandardDeviation ** 2 * (1 / (sumWeights * slope ** 2) + bySlope ** 2 / sumSquaresLogExposure)
  const depth = meanDepthMicrometres + slope * (logValue - meanLogExposure)
  let interval: Interval = { kind: 'unbounded' }
  if (fit.degreesOfFreedom > 0) {
    const half = tQuantile(0.5 + fit.confidenceLevel / 2, fit.degreesOfFreedom) * Math.sqrt(variance)
    interval = exponentiate({ kind: 'finite', lower: -half, upper: half }, logValue)
  }
  const { depthMicrometresMin, depthMicrometresMax } = fit.measuredRange
  return {
    rule,
    layerHeightMicrometres,
    value: Math.exp(logValue),
    meanInterval: interval,
    singleInterval: interval,
    depthMicrometres: depth,
    extrapolated: depth < depthMicrometresMin || depth > depthMicrometresMax,
  }
}

/** Every rule side by side: the rule often moves the answer more than the measurement does. */
export interface LayerRuleComparison {
  readonly byRule: readonly ExposureForLayer[]
  /** Largest answer over smallest. */
  readonly spreadRatio: number
}

/**
 * The exposure for a layer height by all rules, with their spread.
 *
 * @param options.rules - one of each kind; the starting values where absent
 */
export function compareLayerRules(
  fit: WorkingCurveFit,
  options: { readonly layerHeightMicrometres: number; readonly rules?: readonly LayerRuleChoice[] },
): LayerRuleComparison {
  const rules = options.rules ?? (['constant-overcure', 'constant-ratio', 'far-side-dose'] as const)
  const byRule = rules.map(rule => exposureForLayer(fit, { layerHeightMicrometres: options.layerHeightMicrometres, rule }))
  const values = byRule.map(answer => answer.value)
  return { byRule, spreadRatio: Math.max(...values) / Math.min(...values) }
}
