import { formatExposure, formatLength } from '../format.ts'
import type { ExposureForDepth, Finding, WorkingCurveFit } from './types.ts'

/**
 * What a person should know about one answer read from the curve: outside the measured films, or without two ends.
 *
 * @example
 * answerFindings(fit, exposureForDepth(fit, 500)).map(finding => finding.sentence)
 */
export function answerFindings(fit: WorkingCurveFit, answer: ExposureForDepth): readonly Finding[] {
  const findings: Finding[] = []
  const { depthMicrometresMin, depthMicrometresMax } = fit.measuredRange
  if (answer.extrapolated) {
    const below = answer.depthMicrometres < depthMicrometresMin
    findings.push({
      code: 'outside-range', severity: 'caution',
      sentence: `${formatLength(answer.depthMicrometres)} lies outside the measured films (${formatLength(depthMicrometresMin)} to ${formatLength(depthMicrometresMax)}): the interval holds only if the curve stays straight there. Add a ${below ? 'thinner' : 'thicker'} film.`,
      numbers: { depthMicrometres: answer.depthMicrometres, depthMicrometresMin, depthMicrometresMax },
    })
  }
  if (answer.meanInterval.kind === 'unbounded') {
    findings.push({
      code: 'interval-open', severity: 'serious',
      sentence: `The films do not determine the exposure for ${formatLength(answer.depthMicrometres)}: more films are needed.`,
      numbers: { value: answer.value },
      source: 'Fieller, J. R. Stat. Soc. B 16 (1954) 175',
    })
  } else if (answer.meanInterval.kind === 'exclusive') {
    const [low, high] = answer.meanInterval.roots
    findings.push({
      code: 'interval-open', severity: 'serious',
      sentence: `The films do not determine the exposure for ${formatLength(answer.depthMicrometres)}: they rule out only ${formatExposure(low, fit.exposureKind)} to ${formatExposure(high, fit.exposureKind)}. More films, further apart, are needed.`,
      numbers: { lowerRoot: low, upperRoot: high },
      source: 'Fieller, J. R. Stat. Soc. B 16 (1954) 175',
    })
  }
  return findings
}
