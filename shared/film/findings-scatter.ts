import { formatExposure } from '../format.ts'
import { tTwoSidedTail } from '../stats/quantiles.ts'
import type { FilmPoint, Finding, WorkingCurveFit } from './types.ts'

/** Bonferroni p below which one film is called odd; at 2 % a faultless set is rarely accused (simulation). */
const outlierLevel = 0.02
/** With four films or fewer, the film that looks odd is as likely as not the wrong one. */
const outlierFilmsMin = 5

/** One film that does not fit the others, or that decides the line by itself. */
export function singleFilmFindings(fit: WorkingCurveFit): Finding[] {
  let odd: FilmPoint | undefined
  let oddest = 0
  let strongest: FilmPoint | undefined
  let largestMove = 0
  for (const point of fit.points) {
    const size = Math.abs(point.studentisedResidual ?? 0)
    if (size > oddest) {
      oddest = size
      odd = point
    }
    const move = moveWithout(fit, point)
    if (move > largestMove) {
      largestMove = move
      strongest = point
    }
  }
  if (odd !== undefined && fit.filmCount >= outlierFilmsMin && fit.degreesOfFreedom > 1) {
    const pValue = Math.min(1, fit.filmCount * tTwoSidedTail(oddest, fit.degreesOfFreedom - 1))
    if (pValue < outlierLevel) return [outlierFinding(fit, odd, oddest, pValue)]
  }
  if (strongest !== undefined && largestMove > 1 && fit.degreesOfFreedom > 1) {
    return [{
      code: 'influence', severity: 'caution', readingIndexes: strongest.readingIndexes,
      sentence: `One film decides much: it moves the curve by more than the interval tells; ${withoutText(fit, strongest)} Measure a second film at ${formatExposure(strongest.exposure, fit.exposureKind)}.`,
      numbers: { cooksDistance: strongest.cooksDistance, leverage: strongest.leverage, moveInHalfIntervals: largestMove, ...without(fit, strongest) },
      formula: 'change of Dp without the film / half-width of the interval of Dp > 1',
      source: 'Belsley, Kuh & Welsch, Regression Diagnostics (1980), deletion diagnostics; from memory',
    }]
  }
  return []
}

/**
 * How far Dp moves without a film, in half-widths of its interval. Cook's distance beyond 1, the common limit, would
 * accuse four in five faultless sets of four films.
 */
function moveWithout(fit: WorkingCurveFit, point: FilmPoint): number {
  const { interval, value } = fit.penetrationDepthMicrometres
  const free = 1 - point.leverage
  if (interval.kind !== 'finite' || !(free > 1e-9)) return 0
  const distance = Math.log(point.exposure) - fit.centre.meanLogExposure
  const change = (point.weight * point.residualMicrometres * distance) / (free * fit.centre.sumSquaresLogExposure)
  return Math.abs(change) / (interval.upper - value)
}

function outlierFinding(fit: WorkingCurveFit, odd: FilmPoint, size: number, pValue: number): Finding {
  const side = odd.residualMicrometres > 0 ? 'above' : 'below'
  return {
    code: 'outlier', severity: 'serious', readingIndexes: odd.readingIndexes,
    sentence: `The film of ${Math.round(odd.depthMicrometres)} µm at ${formatExposure(odd.exposure, fit.exposureKind)} does not fit the others: it lies ${Math.round(Math.abs(odd.residualMicrometres))} µm ${side} the line. It stays in unless you exclude it with a reason; ${withoutText(fit, odd)}`,
    numbers: { studentisedResidual: Math.sign(odd.residualMicrometres) * size, bonferroniPValue: pValue, residualMicrometres: odd.residualMicrometres, ...without(fit, odd) },
    formula: 'externally studentised residual; p = films · P(|t| above it)',
    source: 'Cook & Weisberg, Residuals and Influence in Regression (1982)',
  }
}

/** Dp and Ec of the fit without one film, from its leverage: no second fit is needed. */
function without(fit: WorkingCurveFit, point: FilmPoint): Record<string, number> {
  const { meanLogExposure, meanDepthMicrometres, sumSquaresLogExposure, sumWeights } = fit.centre
  const free = 1 - point.leverage
  if (!(free > 1e-9)) return {}
  const pull = (point.weight * point.residualMicrometres) / free
  const slope = fit.penetrationDepthMicrometres.value - (pull * (Math.log(point.exposure) - meanLogExposure)) / sumSquaresLogExposure
  const critical = Math.exp(meanLogExposure - (meanDepthMicrometres - pull / sumWeights) / slope)
  return slope > 0 && Number.isFinite(critical) ? { withoutPenetrationDepthMicrometres: slope, withoutCriticalExposure: critical } : {}
}

function withoutText(fit: WorkingCurveFit, point: FilmPoint): string {
  const { withoutPenetrationDepthMicrometres: depth, withoutCriticalExposure: critical } = without(fit, point)
  if (depth === undefined || critical === undefined) return 'without it there would be no curve.'
  const dp = fit.penetrationDepthMicrometres.value
  const ec = fit.criticalExposure.value
  return `without it Dp would be ${Math.round(depth)} µm instead of ${Math.round(dp)} µm, and the critical exposure ${formatExposure(critical, fit.exposureKind)} instead of ${formatExposure(ec, fit.exposureKind)}.`
}

/** Does the scatter grow with depth? |residual| regressed on fitted depth, as a t test (Glejser). */
export function spreadFindings(fit: WorkingCurveFit): Finding[] {
  if (fit.weighting !== 'equal' || fit.filmCount < 8) return []
  const fitted = fit.points.map(point => point.depthMicrometres - point.residualMicrometres)
  const sizes = fit.points.map(point => Math.abs(point.residualMicrometres) / Math.sqrt(Math.max(1e-12, 1 - point.leverage)))
  const count = fitted.length
  const meanX = fitted.reduce((a, b) => a + b, 0) / count
  const meanY = sizes.reduce((a, b) => a + b, 0) / count
  let sxx = 0
  let sxy = 0
  let syy = 0
  for (let i = 0; i < count; i++) {
    const dx = (fitted[i] ?? 0) - meanX
    const dy = (sizes[i] ?? 0) - meanY
    sxx += dx * dx
    sxy += dx * dy
    syy += dy * dy
  }
  const slope = sxy / sxx
  const rest = Math.max(0, syy - slope * sxy)
  const t = slope / Math.sqrt(rest / (count - 2) / sxx)
  if (!(slope > 0) || !Number.isFinite(t)) return []
  const pValue = tTwoSidedTail(t, count - 2)
  if (pValue >= 0.05) return []
  return [{
    code: 'spread-grows', severity: 'caution',
    sentence: 'Thicker films scatter more. If the gauge is declared as a percentage, weighting by it would be right; otherwise keep to thinner films.',
    numbers: { slopePerMicrometre: slope, t, pValue },
    formula: '|residual| regressed on fitted depth',
    source: 'Glejser, J. Am. Stat. Assoc. 64 (1969) 316',
  }]
}
