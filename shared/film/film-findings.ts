import { lackOfFit } from '../stats/lack-of-fit.ts'
import { fUpperTail, tQuantile, tTwoSidedTail } from '../stats/quantiles.ts'
import { curvatureOf } from './curvature.ts'
import type { Finding, WorkingCurveFit } from './types.ts'

/** Two-sided p below which a check speaks up. */
const alarmLevel = 0.05

function exposureText(fit: WorkingCurveFit, exposure: number): string {
  const digits = exposure >= 100 ? 0 : exposure >= 10 ? 1 : 2
  return `${exposure.toFixed(digits)} ${fit.exposureKind === 'seconds' ? 's' : 'mJ/cm²'}`
}

/**
 * What a person should know about a fitted working curve, most serious first.
 *
 * Each finding says it in a sentence; its numbers, formula and source stand behind that.
 */
export function filmFindings(fit: WorkingCurveFit): readonly Finding[] {
  const findings = [
    ...slopeAndEc(fit),
    ...design(fit),
    ...shape(fit),
    ...singleFilms(fit),
    ...spread(fit),
    ...leftOut(fit),
  ]
  const order = { serious: 0, caution: 1, info: 2 }
  return findings.sort((a, b) => order[a.severity] - order[b.severity])
}

function slopeAndEc(fit: WorkingCurveFit): Finding[] {
  const dp = fit.penetrationDepthMicrometres
  if (fit.degreesOfFreedom < 1) {
    return [{
      code: 'few-films', severity: 'serious',
      sentence: 'Two films make a line but no interval: nothing tells how far off it is. Measure at least one more film, better four.',
      numbers: { films: fit.filmCount },
    }]
  }
  const t = dp.value / dp.standardError
  const findings: Finding[] = []
  if (fit.degreesOfFreedom < 3) {
    findings.push({
      code: 'few-films', severity: 'caution',
      sentence: `${fit.filmCount} films leave ${fit.degreesOfFreedom === 1 ? 'one degree' : `${fit.degreesOfFreedom} degrees`} of freedom: the intervals are wide because the scatter itself is hardly known. Six films are a good number.`,
      numbers: { films: fit.filmCount, degreesOfFreedom: fit.degreesOfFreedom, tQuantile: tQuantile(0.5 + fit.confidenceLevel / 2, fit.degreesOfFreedom) },
      formula: 'half-width = t(df) · standard error',
    })
  }
  if (dp.interval.kind === 'finite' && dp.interval.lower <= 0) {
    findings.push({
      code: 'slope-not-established', severity: 'serious',
      sentence: 'The scatter is so large that the films may not get thicker with exposure at all. No exposure can be told from them yet: measure more films, further apart.',
      numbers: { penetrationDepthMicrometres: dp.value, standardError: dp.standardError, t, pValue: tTwoSidedTail(t, fit.degreesOfFreedom) },
      formula: 'Fieller: unbounded when slope² ≤ t² · variance of the slope',
      source: 'Fieller, JRSS B 16 (1954) 175',
    })
  } else if (fit.criticalExposure.interval.kind !== 'finite') {
    findings.push({
      code: 'critical-exposure-open', severity: 'caution',
      sentence: 'The films do not say how small the critical exposure may be. Add films close to the thinnest that holds together.',
      numbers: { criticalExposure: fit.criticalExposure.value },
      source: 'Fieller, JRSS B 16 (1954) 175',
    })
  }
  return findings
}

function design(fit: WorkingCurveFit): Finding[] {
  const findings: Finding[] = []
  if (fit.levelCount < 4) {
    findings.push({
      code: 'few-levels', severity: 'caution',
      sentence: `Only ${fit.levelCount} different exposures: whether the curve is straight cannot be judged. Four or more are needed.`,
      numbers: { levels: fit.levelCount },
    })
  }
  if (fit.filmCount === fit.levelCount && fit.filmCount > 2) {
    findings.push({
      code: 'no-replicates', severity: 'info',
      sentence: 'No exposure has two films, so scatter and misfit cannot be told apart. A second film at one or two exposures would do.',
      numbers: { films: fit.filmCount, levels: fit.levelCount },
    })
  }
  const dp = fit.penetrationDepthMicrometres.value
  const { depthMicrometresMin } = fit.measuredRange
  // exp(1) ≈ 2.7 times the critical exposure: nearer films fix Ec, further ones only the slope.
  if (depthMicrometresMin > 1.2 * dp) {
    findings.push({
      code: 'only-thick-films', severity: 'caution',
      sentence: `The thinnest film is ${Math.round(depthMicrometresMin)} µm, more than Dp: the critical exposure is an extrapolation and poorly known. Add films near the layer height.`,
      numbers: { thinnestMicrometres: depthMicrometresMin, penetrationDepthMicrometres: dp },
    })
  }
  if (fit.weighting === 'proportional') {
    findings.push({
      code: 'weighting-proportional', severity: 'caution',
      sentence: 'Films are weighted as if the gauge erred by a percentage. If it errs by so many micrometres instead, the intervals are too short: 95 % become about 75 %.',
      numbers: {},
      formula: 'weight = 1 / depth²',
    })
  }
  return findings
}

function shape(fit: WorkingCurveFit): Finding[] {
  const findings: Finding[] = []
  const x = fit.points.map(point => Math.log(point.exposure))
  const y = fit.points.map(point => point.depthMicrometres)
  const weights = fit.points.map(point => point.weight)
  const residualSumOfSquares = fit.residualStandardDeviation ** 2 * fit.degreesOfFreedom
  const test = lackOfFit({ x, y, weights, residualSumOfSquares, parameters: 2 })
  if (test !== null && test.pValue < alarmLevel) {
    findings.push({
      code: 'lack-of-fit', severity: 'serious',
      sentence: 'The films stray from the straight line by more than films of one exposure stray from each other. Look for a bend, a swapped row or a film read twice.',
      numbers: { f: test.f, numeratorDegreesOfFreedom: test.lackOfFitDegreesOfFreedom, denominatorDegreesOfFreedom: test.pureErrorDegreesOfFreedom, pValue: test.pValue },
      formula: 'F = (lack-of-fit SS / df) / (pure-error SS / df)',
      source: 'NIST/SEMATECH e-Handbook of Statistical Methods, 4.4.4.6',
    })
  }
  const bend = curvatureOf(fit)
  if (bend !== null && bend.pValue < alarmLevel) {
    const direction = bend.coefficient < 0 ? 'it flattens' : 'it steepens'
    const lowest = exposureText(fit, Math.exp(bend.turnLogExposure))
    findings.push({
      code: 'curvature', severity: 'serious',
      sentence: `The film curve bends: above ${lowest} ${direction}. Dp holds only for the measured range; keep to exposures near the target, or compare the other curves.`,
      numbers: { quadraticMicrometres: bend.coefficient, standardError: bend.standardError, t: bend.t, degreesOfFreedom: bend.degreesOfFreedom, pValue: bend.pValue, f: bend.t ** 2, fPValue: fUpperTail(bend.t ** 2, 1, bend.degreesOfFreedom) },
      formula: 'depth = a + b ln E + c (ln E)², t = c / standard error of c',
      source: 'Draper & Smith, Applied Regression Analysis (extra sum of squares)',
    })
  }
  return findings
}

function singleFilms(fit: WorkingCurveFit): Finding[] {
  const findings: Finding[] = []
  let worst = -1
  for (const [i, point] of fit.points.entries()) {
    if (point.studentisedResidual !== null && Math.abs(point.studentisedResidual) > Math.abs(fit.points[worst]?.studentisedResidual ?? 0)) worst = i
  }
  const point = fit.points[worst]
  if (point !== undefined && point.studentisedResidual !== null && fit.degreesOfFreedom > 1) {
    const pValue = Math.min(1, fit.filmCount * tTwoSidedTail(point.studentisedResidual, fit.degreesOfFreedom - 1))
    if (pValue < alarmLevel) {
      findings.push({
        code: 'outlier', severity: 'serious', readingIndexes: point.readingIndexes,
        sentence: `The film of ${Math.round(point.depthMicrometres)} µm at ${exposureText(fit, point.exposure)} does not fit the others: it lies ${Math.abs(point.residualMicrometres).toFixed(0)} µm ${point.residualMicrometres > 0 ? 'above' : 'below'} the line. It stays in unless you exclude it with a reason; the curve without it is shown beside.`,
        numbers: { studentisedResidual: point.studentisedResidual, bonferroniPValue: pValue, residualMicrometres: point.residualMicrometres },
        formula: 'externally studentised residual, p times the number of films (Bonferroni)',
        source: 'Cook & Weisberg, Residuals and Influence in Regression (1982)',
      })
      return findings
    }
  }
  const strongest = fit.points.reduce((a, b) => (b.cooksDistance > a.cooksDistance ? b : a))
  if (strongest.cooksDistance > 1 && fit.degreesOfFreedom > 0) {
    findings.push({
      code: 'influence', severity: 'caution', readingIndexes: strongest.readingIndexes,
      sentence: `One film decides much: without the one at ${exposureText(fit, strongest.exposure)} the curve would move clearly. Measure a second film there.`,
      numbers: { cooksDistance: strongest.cooksDistance, leverage: strongest.leverage },
      formula: "Cook's distance = e² h / (2 s² (1 − h)²)",
      source: 'Cook, Technometrics 19 (1977) 15',
    })
  }
  return findings
}

/** Does the scatter grow with depth? Slope of |residual| on fitted depth, as a t test (Glejser). */
function spread(fit: WorkingCurveFit): Finding[] {
  if (fit.weighting !== 'equal' || fit.filmCount < 8) return []
  const fitted = fit.points.map(point => point.depthMicrometres - point.residualMicrometres)
  const sizes = fit.points.map(point => Math.abs(point.residualMicrometres) / Math.sqrt(Math.max(1e-12, 1 - point.leverage)))
  const n = fitted.length
  const meanX = fitted.reduce((a, b) => a + b, 0) / n
  const meanY = sizes.reduce((a, b) => a + b, 0) / n
  let sxx = 0
  let sxy = 0
  let syy = 0
  for (let i = 0; i < n; i++) {
    const dx = (fitted[i] ?? 0) - meanX
    const dy = (sizes[i] ?? 0) - meanY
    sxx += dx * dx
    sxy += dx * dy
    syy += dy * dy
  }
  const slope = sxy / sxx
  const rest = Math.max(0, syy - slope * sxy)
  const t = slope / Math.sqrt(rest / (n - 2) / sxx)
  if (!(slope > 0) || !(Number.isFinite(t)) || tTwoSidedTail(t, n - 2) > alarmLevel) return []
  return [{
    code: 'spread-grows', severity: 'caution',
    sentence: 'Thicker films scatter more. If the gauge is declared as a percentage, weighting by it would be right; otherwise keep to thinner films.',
    numbers: { slopePerMicrometre: slope, t, pValue: tTwoSidedTail(t, n - 2) },
    formula: '|residual| regressed on fitted depth',
    source: 'Glejser, JASA 64 (1969) 316',
  }]
}

function leftOut(fit: WorkingCurveFit): Finding[] {
  if (fit.censoredIndexes.length === 0) return []
  const one = fit.censoredIndexes.length === 1
  return [{
    code: 'censored-left-out', severity: 'info', readingIndexes: fit.censoredIndexes,
    sentence: `${one ? 'One film' : `${fit.censoredIndexes.length} films`} did not form or ${one ? 'was' : 'were'} lost: shown, but not in the straight line. They can enter as "thinner than measurable".`,
    numbers: { films: fit.censoredIndexes.length },
    source: 'Tobin, Econometrica 26 (1958) 24',
  }]
}
