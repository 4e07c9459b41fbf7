import { modelDepthAt, type AcceptedCurve } from '#shared/film/index.ts'
import type { CurveSample } from './film-answer-types.ts'

/** The accepted curve as a line for the chart. */
export function curveSamples(curve: AcceptedCurve, exposures: readonly number[]): readonly CurveSample[] | null {
  if (curve.name === 'straight-line') return null
  if (curve.name === 'with-missing-films') {
    const [height, slope] = curve.fit.coefficients
    return exposures.map(exposure => ({ exposure, depth: height + slope * (Math.log(exposure) - curve.fit.meanLogExposure), confidence: null, prediction: null }))
  }
  const { fit } = curve
  return exposures.flatMap((exposure): readonly CurveSample[] => {
    // A dead-time curve has no depth before its dead time is over.
    if (fit.model === 'dead-time' && exposure <= fit.deadTime.value) return []
    const at = modelDepthAt(fit, exposure)
    if (!Number.isFinite(at.depthMicrometres)) return []
    return [{ exposure, depth: at.depthMicrometres, confidence: at.confidenceInterval.kind === 'finite' ? [at.confidenceInterval.lower, at.confidenceInterval.upper] : null, prediction: null }]
  })
}
