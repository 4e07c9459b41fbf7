import type { Interval } from '../stats/types.ts'
import { exposureForDepth } from './exposure-for-depth.ts'
import { exposureForLayer } from './exposure-for-layer.ts'
import { modelExposureForDepth } from './film-model-answers.ts'
import type { FilmModelFit } from './film-model-types.ts'
import { censoredExposureForDepth, fitCensoredWorkingCurve, type CensoredWorkingCurve } from './fit-censored-working-curve.ts'
import { fitDeadTimeCurve } from './fit-dead-time-curve.ts'
import { fitQuadraticCurve } from './fit-quadratic-curve.ts'
import { fitTwoLineAttenuation } from './fit-two-line-attenuation.ts'
import type { WorkingCurveOptions } from './fit-working-curve.ts'
import type { LayerRuleChoice } from './layer-rules.ts'
import type { WorkingCurveFit } from './types.ts'

/**
 * Thinnest film that would have held and been measured, where nobody knows better: a film thinner than this rarely
 * survives the wash. Common practice, no published source.
 */
const thinnestHeldMicrometres = 20

const modelFits = { 'dead-time': fitDeadTimeCurve, quadratic: fitQuadraticCurve, 'two-line-attenuation': fitTwoLineAttenuation } as const

/** What a person accepted for a study. */
export interface CurveChoice {
  readonly model: 'straight-line' | keyof typeof modelFits
  /** Missing films enter as thinner than the limit; for the straight line only. */
  readonly useCensored: boolean
}

export type AcceptedCurve =
  | { readonly name: 'straight-line'; readonly fit: WorkingCurveFit; readonly remark: string | null }
  | { readonly name: FilmModelFit['model']; readonly fit: FilmModelFit; readonly remark: null }
  | { readonly name: 'with-missing-films'; readonly fit: CensoredWorkingCurve; readonly remark: null }

/** The limit in µm below which a missing film is taken to lie: no measured film may be thinner. */
export function missingFilmLimit(fit: WorkingCurveFit): number {
  return Math.min(thinnestHeldMicrometres, fit.measuredRange.depthMicrometresMin)
}

/** The straight line with the missing films in it. */
export const withMissingFilms = (options: WorkingCurveOptions, straight: WorkingCurveFit) =>
  fitCensoredWorkingCurve({
    readings: options.readings, exposureKind: options.exposureKind, limitMicrometres: missingFilmLimit(straight),
    ...(options.confidenceLevel === undefined ? {} : { confidenceLevel: options.confidenceLevel }),
  })

/**
 * The curve that a study's answers rest on: what the person accepted, else the straight line; a refusal is said in the
 * remark, never hidden. One place, so that page, bench and exports tell the same number.
 *
 * @example
 * acceptedCurve(options, straight, { model: 'dead-time', useCensored: false }).name
 */
export function acceptedCurve(options: WorkingCurveOptions, straight: WorkingCurveFit, choice: CurveChoice): AcceptedCurve {
  if (choice.model !== 'straight-line') {
    const fit = modelFits[choice.model](options)
    if (fit.kind === 'fitted') return { name: fit.model, fit, remark: null }
    return { name: 'straight-line', fit: straight, remark: `The curve chosen for this study cannot be fitted to these films: ${fit.detail} The straight line is used.` }
  }
  if (choice.useCensored && straight.censoredIndexes.length > 0) {
    const fit = withMissingFilms(options, straight)
    if (fit.kind === 'fitted') return { name: 'with-missing-films', fit, remark: null }
    return { name: 'straight-line', fit: straight, remark: `Missing films cannot enter: ${fit.detail} The straight line of the measured films is used.` }
  }
  return { name: 'straight-line', fit: straight, remark: null }
}

export interface CurveExposure {
  readonly kind: 'answered'
  readonly depthMicrometres: number
  readonly value: number
  readonly meanInterval: Interval
  /** Null where the curve has no interval for one film. */
  readonly singleInterval: Interval | null
  readonly extrapolated: boolean
}
export type CurveExposureOutcome = CurveExposure | { readonly kind: 'refused'; readonly detail: string }

/**
 * The exposure that cures to a depth by any of the curves.
 *
 * @throws {StatsError} `depth-out-of-range`
 */
export function curveExposure(curve: AcceptedCurve, depthMicrometres: number, measured: WorkingCurveFit['measuredRange']): CurveExposureOutcome {
  if (curve.name === 'straight-line') return { kind: 'answered', ...exposureForDepth(curve.fit, depthMicrometres) }
  if (curve.name === 'with-missing-films') {
    const extrapolated = depthMicrometres < measured.depthMicrometresMin || depthMicrometres > measured.depthMicrometresMax
    return { kind: 'answered', singleInterval: null, extrapolated, ...censoredExposureForDepth(curve.fit, depthMicrometres) }
  }
  const answer = modelExposureForDepth(curve.fit, depthMicrometres)
  return answer.kind === 'refused' ? answer : { ...answer, singleInterval: null }
}

/**
 * The exposure for a layer height by the accepted curve: the number that a study answers with.
 *
 * @throws {StatsError} `layer-height-out-of-range`, `rule-out-of-range`
 */
export function curveExposureForLayer(
  curve: AcceptedCurve,
  straight: WorkingCurveFit,
  options: { readonly layerHeightMicrometres: number; readonly rule: LayerRuleChoice },
): CurveExposureOutcome {
  const byLine = exposureForLayer(straight, options)
  if (curve.name === 'straight-line') return { kind: 'answered', ...byLine }
  if (byLine.rule.kind === 'far-side-dose') return { kind: 'refused', detail: 'The rule of the far-side dose needs one Dp: choose another rule, or the straight line.' }
  return curveExposure(curve, byLine.depthMicrometres, straight.measuredRange)
}
