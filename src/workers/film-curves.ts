import type { FilmSettings } from '#shared/contracts/studies.ts'
import {
  censoredExposureForDepth, exposureForDepth, fitCensoredWorkingCurve, fitDeadTimeCurve, fitQuadraticCurve, fitTwoLineAttenuation, modelDepthAt, modelExposureForDepth,
  type CensoredWorkingCurve, type FilmModelFit, type FilmModelName, type Interval, type WorkingCurveFit, type WorkingCurveOptions,
} from '#shared/film/index.ts'
import type { CurveSample } from './film-answer-types.ts'

/**
 * Thinnest film that would have held and been measured, where nobody knows better: a film thinner than this rarely
 * survives the wash. Common practice, no published source.
 */
const thinnestHeldMicrometres = 20

export type AcceptedCurve =
  | { readonly name: 'straight-line'; readonly fit: WorkingCurveFit; readonly remark: string | null }
  | { readonly name: Exclude<FilmModelName, 'straight-line'>; readonly fit: FilmModelFit; readonly remark: null }
  | { readonly name: 'with-missing-films'; readonly fit: CensoredWorkingCurve; readonly remark: null }

const modelFits = { 'dead-time': fitDeadTimeCurve, quadratic: fitQuadraticCurve, 'two-line-attenuation': fitTwoLineAttenuation } as const

/** The limit below which a missing film is taken to lie: no measured film may be thinner. */
export function missingFilmLimit(fit: WorkingCurveFit): number {
  return Math.min(thinnestHeldMicrometres, fit.measuredRange.depthMicrometresMin)
}

export const withMissingFilms = (options: WorkingCurveOptions, straight: WorkingCurveFit) =>
  fitCensoredWorkingCurve({
    readings: options.readings, exposureKind: options.exposureKind, limitMicrometres: missingFilmLimit(straight),
    ...(options.confidenceLevel === undefined ? {} : { confidenceLevel: options.confidenceLevel }),
  })

/** The curve that a study's answers rest on: what the person accepted, else the straight line; a refusal is said, never hidden. */
export function acceptedCurve(options: WorkingCurveOptions, straight: WorkingCurveFit, film: FilmSettings): AcceptedCurve {
  if (film.model !== 'straight-line') {
    const fit = modelFits[film.model](options)
    if (fit.kind === 'fitted') return { name: fit.model, fit, remark: null }
    return { name: 'straight-line', fit: straight, remark: `The curve chosen for this study cannot be fitted to these films: ${fit.detail} The straight line is used.` }
  }
  if (film.useCensored && straight.censoredIndexes.length > 0) {
    const fit = withMissingFilms(options, straight)
    if (fit.kind === 'fitted') return { name: 'with-missing-films', fit, remark: null }
    return { name: 'straight-line', fit: straight, remark: `Missing films cannot enter: ${fit.detail} The straight line of the measured films is used.` }
  }
  return { name: 'straight-line', fit: straight, remark: null }
}

export type CurveExposure =
  | { readonly kind: 'answered'; readonly value: number; readonly meanInterval: Interval; readonly singleInterval: Interval | null; readonly extrapolated: boolean }
  | { readonly kind: 'refused'; readonly detail: string }

/** The exposure for a depth by any of the curves. */
export function curveExposure(curve: AcceptedCurve, depthMicrometres: number, measured: WorkingCurveFit['measuredRange']): CurveExposure {
  if (curve.name === 'straight-line') return { kind: 'answered', ...exposureForDepth(curve.fit, depthMicrometres) }
  if (curve.name === 'with-missing-films') {
    const extrapolated = depthMicrometres < measured.depthMicrometresMin || depthMicrometres > measured.depthMicrometresMax
    return { kind: 'answered', singleInterval: null, extrapolated, ...censoredExposureForDepth(curve.fit, depthMicrometres) }
  }
  const answer = modelExposureForDepth(curve.fit, depthMicrometres)
  return answer.kind === 'refused' ? answer : { ...answer, singleInterval: null }
}

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
