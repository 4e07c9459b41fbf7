import { circleExtremes } from '../stats/circle-extremes.ts'
import { tQuantile } from '../stats/quantiles.ts'
import type { Interval } from '../stats/types.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import { exposureForDepth, singleFilmVariance } from './exposure-for-depth.ts'
import { checkLayerHeight, completeRule, type CompleteRule, type LayerRuleChoice } from './layer-rules.ts'
import type { WorkingCurveFit } from './types.ts'

export interface ExposureForLayer {
  readonly rule: CompleteRule
  readonly layerHeightMicrometres: number
  readonly value: number
  readonly meanInterval: Interval
  /** For one new film rather than the mean of many: adds one residual variance. */
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
  const depth =
    rule.kind === 'constant-overcure'
      ? layerHeightMicrometres + rule.overcureMicrometres
      : layerHeightMicrometres * rule.ratio
  return { rule, layerHeightMicrometres, ...exposureForDepth(fit, depth) }
}

function farSideDose(
  fit: WorkingCurveFit,
  layerHeightMicrometres: number,
  rule: Extract<CompleteRule, { kind: 'far-side-dose' }>,
): ExposureForLayer {
  const { meanLogExposure, meanDepthMicrometres, sumSquaresLogExposure, sumWeights } = fit.centre
  const slope = fit.penetrationDepthMicrometres.value
  /** ln E from the depth at the centre and the slope, as distance from the centre. */
  const logAt = (centreDepth: number, slopeAt: number): number =>
    slopeAt > 0
      ? Math.log(rule.doseRatio) + logExpm1(layerHeightMicrometres / slopeAt) - centreDepth / slopeAt
      : NaN
  const log = logAt(meanDepthMicrometres, slope)
  const depth = meanDepthMicrometres + slope * log
  const scatter = fit.residualStandardDeviation
  const interval = (extraVariance: number): Interval => {
    if (fit.degreesOfFreedom < 1) return { kind: 'unbounded' }
    const quantile = tQuantile(0.5 + fit.confidenceLevel / 2, fit.degreesOfFreedom)
    const centreReach = quantile * Math.sqrt(scatter ** 2 / sumWeights + extraVariance)
    const slopeReach = (quantile * scatter) / Math.sqrt(sumSquaresLogExposure)
    if (slopeReach >= slope) return { kind: 'unbounded' }
    // Exact for the t region of the line: the same construction gives Fieller's interval where the rule is linear in depth.
    const ends = circleExtremes((u, v) =>
      logAt(meanDepthMicrometres + centreReach * u, slope + slopeReach * v),
    )
    return ends === null ? { kind: 'unbounded' } : exponentiate({ kind: 'finite', ...ends }, meanLogExposure)
  }
  const { depthMicrometresMin, depthMicrometresMax } = fit.measuredRange
  return {
    rule,
    layerHeightMicrometres,
    value: Math.exp(meanLogExposure + log),
    meanInterval: interval(0),
    singleInterval: interval(singleFilmVariance(fit, depth)),
    depthMicrometres: depth,
    extrapolated: depth < depthMicrometresMin || depth > depthMicrometresMax,
  }
}

/** ln(e^x − 1) without overflow for layers much thicker than Dp. */
const logExpm1 = (x: number): number => (x > 30 ? x + Math.log1p(-Math.exp(-x)) : Math.log(Math.expm1(x)))

/** Every rule side by side: the rule often moves the answer more than the measurement does. */
export interface LayerRuleComparison {
  readonly byRule: readonly ExposureForLayer[]
  /** Largest answer over smallest. */
  readonly spreadRatio: number
  /** Widest finite interval, upper end over lower end; null where no rule has one. */
  readonly measurementRatio: number | null
  /** Which of the two decides more. */
  readonly sentence: string
}

/**
 * The exposure for a layer height by all rules, with their spread.
 *
 * @param options.rules - one of each kind; the starting values where absent
 * @example
 * compareLayerRules(fit, { layerHeightMicrometres: 50 }).spreadRatio
 */
export function compareLayerRules(
  fit: WorkingCurveFit,
  options: { readonly layerHeightMicrometres: number; readonly rules?: readonly LayerRuleChoice[] },
): LayerRuleComparison {
  const rules = options.rules ?? (['constant-overcure', 'constant-ratio', 'far-side-dose'] as const)
  const byRule = rules.map(rule =>
    exposureForLayer(fit, { layerHeightMicrometres: options.layerHeightMicrometres, rule }),
  )
  const values = byRule.map(answer => answer.value)
  const spreadRatio = Math.max(...values) / Math.min(...values)
  const widths = byRule.flatMap(({ meanInterval }) =>
    meanInterval.kind === 'finite' ? [meanInterval.upper / meanInterval.lower] : [],
  )
  const measurementRatio = widths.length > 0 ? Math.max(...widths) : null
  const times = (ratio: number) => ratio.toFixed(2)
  const sentence =
    measurementRatio === null
      ? `The rules differ by a factor of ${times(spreadRatio)}, and the films do not tell the exposure yet.`
      : spreadRatio > measurementRatio
        ? `The choice of the rule moves the exposure by a factor of ${times(spreadRatio)}, more than the measurement does (${times(measurementRatio)}): let a print confirm it.`
        : `The rules differ by a factor of ${times(spreadRatio)}; the interval of the measurement spans ${times(measurementRatio)}.`
  return { byRule, spreadRatio, measurementRatio, sentence }
}
