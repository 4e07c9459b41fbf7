import { tQuantile, tTwoSidedTail } from '../stats/quantiles.ts'
import { singleFilmFindings, spreadFindings } from './findings-scatter.ts'
import { shapeFindings } from './findings-shape.ts'
import type { Finding, WorkingCurveFit } from './types.ts'

/**
 * What a person should know about a fitted working curve, most serious first.
 *
 * Each finding says it in a sentence; its numbers, formula and source stand behind that.
 */
export function filmFindings(fit: WorkingCurveFit): readonly Finding[] {
  const findings = [
    ...slopeFindings(fit),
    // Without any scatter there is nothing to judge shape and single films against.
    ...(fit.residualStandardDeviation > 0 ? [...shapeFindings(fit), ...singleFilmFindings(fit), ...spreadFindings(fit)] : []),
    ...designFindings(fit),
    ...leftOutFindings(fit),
  ]
  const order = { serious: 0, caution: 1, info: 2 }
  return findings.sort((a, b) => order[a.severity] - order[b.severity])
}

function slopeFindings(fit: WorkingCurveFit): Finding[] {
  const dp = fit.penetrationDepthMicrometres
  const { degreesOfFreedom: df } = fit
  if (df < 1) {
    return [{
      code: 'few-films', severity: 'serious',
      sentence: 'Two films make a line but no interval: nothing tells how far off it is. Measure at least one more film, better four.',
      numbers: { films: fit.filmCount },
    }]
  }
  const findings: Finding[] = []
  if (df < 3) {
    findings.push({
      code: 'few-films', severity: 'caution',
      sentence: `${fit.filmCount} films leave ${df === 1 ? 'one degree' : `${df} degrees`} of freedom: the intervals are wide because the scatter itself is hardly known. Six films are a good number.`,
      numbers: { films: fit.filmCount, degreesOfFreedom: df, tQuantile: tQuantile(0.5 + fit.confidenceLevel / 2, df) },
      formula: 'half-width = t(degrees of freedom) · standard error',
    })
  }
  if (dp.interval.kind === 'finite' && dp.interval.lower <= 0) {
    const t = dp.value / dp.standardError
    findings.push({
      code: 'slope-not-established', severity: 'serious',
      sentence: 'The scatter is so large that the films may not get thicker with exposure at all. No exposure can be told from them yet: measure more films, further apart.',
      numbers: { penetrationDepthMicrometres: dp.value, standardError: dp.standardError, t, pValue: tTwoSidedTail(t, df) },
      formula: 'no two ends when slope² ≤ t² · variance of the slope',
      source: 'Fieller, J. R. Stat. Soc. B 16 (1954) 175',
    })
  } else if (fit.criticalExposure.interval.kind !== 'finite') {
    findings.push({
      code: 'critical-exposure-open', severity: 'caution',
      sentence: 'The films do not say how small the critical exposure may be. Add films close to the thinnest that holds together.',
      numbers: { criticalExposure: fit.criticalExposure.value },
      source: 'Fieller, J. R. Stat. Soc. B 16 (1954) 175',
    })
  }
  return findings
}

function designFindings(fit: WorkingCurveFit): Finding[] {
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
  const thinnest = fit.measuredRange.depthMicrometresMin
  // Films from 1.2 Dp on (3.3 times Ec) leave ln Ec more than twice as uncertain as films that begin at 1.5 times Ec.
  if (thinnest > 1.2 * dp) {
    const share = fit.criticalExposure.standardError / fit.criticalExposure.value
    findings.push({
      code: 'only-thick-films', severity: 'caution',
      sentence: `Only thick films: the thinnest has ${Math.round(thinnest)} µm, more than Dp, so the critical exposure is an extrapolation and poorly known. Add films near the layer height.`,
      numbers: { thinnestMicrometres: thinnest, penetrationDepthMicrometres: dp, ...(Number.isFinite(share) ? { relativeStandardErrorOfCriticalExposure: share } : {}) },
      formula: 'SE(ln Ec) = (s / Dp) · √(1/n + (x̄ − ln Ec)² / Sxx)',
    })
  }
  if (fit.weighting === 'proportional') {
    findings.push({
      code: 'weighting-proportional', severity: 'caution',
      sentence: 'Films are weighted as if the gauge erred by a percentage. If it errs by so many micrometres instead, the intervals are too short: 95 % become 60 to 80 %.',
      numbers: {},
      formula: 'weight = 1 / depth²',
      source: 'our simulation (npm run simulate)',
    })
  }
  return findings
}

function leftOutFindings(fit: WorkingCurveFit): Finding[] {
  const findings: Finding[] = []
  const count = (indexes: readonly number[], one: string, many: string) => (indexes.length === 1 ? one : `${indexes.length} ${many}`)
  if (fit.notAboveZeroIndexes.length > 0) {
    findings.push({
      code: 'not-above-zero', severity: 'caution', readingIndexes: fit.notAboveZeroIndexes,
      sentence: `${count(fit.notAboveZeroIndexes, 'One reading is', 'readings are')} zero or below and left out: by the gauge there is no film. Say "no film", or check the gauge's zero and the substrate.`,
      numbers: { readings: fit.notAboveZeroIndexes.length },
    })
  }
  if (fit.censoredIndexes.length > 0) {
    const one = fit.censoredIndexes.length === 1
    findings.push({
      code: 'censored-left-out', severity: 'info', readingIndexes: fit.censoredIndexes,
      sentence: `${count(fit.censoredIndexes, 'One film', 'films')} did not form or ${one ? 'was' : 'were'} lost: shown, but not in the straight line. They can enter as "thinner than measurable".`,
      numbers: { films: fit.censoredIndexes.length },
      source: 'Tobin, Econometrica 26 (1958) 24',
    })
  }
  return findings
}
