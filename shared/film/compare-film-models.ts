import { fUpperTail } from '../stats/quantiles.ts'
import type { Interval, Refused } from '../stats/types.ts'
import { exposureForDepth } from './exposure-for-depth.ts'
import { modelExposureForDepth } from './film-model-answers.ts'
import type { FilmModelFit, FilmModelRefusal } from './film-model-types.ts'
import { fitDeadTimeCurve } from './fit-dead-time-curve.ts'
import { fitQuadraticCurve } from './fit-quadratic-curve.ts'
import { fitTwoLineAttenuation, type TwoLineOptions } from './fit-two-line-attenuation.ts'
import { fitWorkingCurve } from './fit-working-curve.ts'
import type { WorkingCurveFit, WorkingCurveRefusal } from './types.ts'

export type FilmModelName = 'straight-line' | FilmModelFit['model']

export interface ComparedModel {
  readonly kind: 'compared'
  readonly model: FilmModelName
  readonly parameterCount: number
  readonly residualStandardDeviation: number
  readonly degreesOfFreedom: number
  /** Akaike's criterion with the correction for few films; infinite where too few films are left for it. */
  readonly aicc: number
  /** Above that of the straight line: negative is better. */
  readonly aiccChange: number
  /** Against the straight line, where it is a case of this model inside its limits. */
  readonly test: { readonly f: number; readonly numeratorDegreesOfFreedom: number; readonly denominatorDegreesOfFreedom: number; readonly pValue: number } | null
  /** Exposure for the target depth; refused where the curve does not reach it. */
  readonly answer: { readonly kind: 'answered'; readonly value: number; readonly interval: Interval } | Refused<'depth-not-reached'>
  /** Of the answer against the straight line's, in per cent. */
  readonly changePercent: number | null
}

export interface FilmModelComparison {
  readonly kind: 'compared'
  readonly depthMicrometres: number
  readonly straightLine: WorkingCurveFit
  /** The straight line first, then the others, each compared or refused. */
  readonly models: readonly (ComparedModel | (FilmModelRefusal & { readonly model: FilmModelName }))[]
  /** The straight line, unless another is clearly better; a person accepts it or not. */
  readonly preferred: FilmModelName
  readonly sentence: string
}

/** What "clearly better" takes. */
const clearly = { aiccBelow: -4, pBelow: 0.01 }

/**
 * The straight line beside the curves that bend: fit, price in parameters, and what each does to the answer.
 *
 * Sources: Hurvich & Tsai, Biometrika 76 (1989) 297 (AICc); Draper & Smith, Applied Regression Analysis (extra sum of
 * squares).
 *
 * @param options.depthMicrometres - the target depth whose exposure is asked
 * @throws {StatsError} as `fitWorkingCurve`
 * @example
 * compareFilmModels({ readings, exposureKind: 'seconds', depthMicrometres: 100 }).preferred
 */
export function compareFilmModels(options: TwoLineOptions & { readonly depthMicrometres: number }): FilmModelComparison | WorkingCurveRefusal {
  const { depthMicrometres } = options
  const straight = fitWorkingCurve(options)
  if (straight.kind === 'refused') return straight
  const squares = straight.residualStandardDeviation ** 2 * straight.degreesOfFreedom
  const lineAicc = aiccOf(straight.filmCount, 2, squares)
  const answer = exposureForDepth(straight, depthMicrometres)
  const line: ComparedModel = {
    kind: 'compared',
    model: 'straight-line',
    parameterCount: 2,
    residualStandardDeviation: straight.residualStandardDeviation,
    degreesOfFreedom: straight.degreesOfFreedom,
    aicc: lineAicc,
    aiccChange: 0,
    test: null,
    answer: { kind: 'answered', value: answer.value, interval: answer.meanInterval },
    changePercent: 0,
  }
  const compared = (model: FilmModelName, outcome: FilmModelFit | FilmModelRefusal) => {
    if (outcome.kind === 'refused') return { ...outcome, model }
    return compareOne(outcome, { squares, aicc: lineAicc, value: answer.value, degrees: straight.degreesOfFreedom }, depthMicrometres)
  }
  const models = [
    line,
    compared('dead-time', fitDeadTimeCurve(options)),
    compared('quadratic', fitQuadraticCurve(options)),
    compared('two-line', fitTwoLineAttenuation(options)),
  ]
  let best = line
  for (const model of models) {
    if (model.kind === 'compared' && isClearlyBetter(model) && model.aicc < best.aicc) best = model
  }
  return { kind: 'compared', depthMicrometres, straightLine: straight, models, preferred: best.model, sentence: sentenceFor(best, depthMicrometres) }
}

function aiccOf(films: number, parameters: number, squares: number): number {
  const counted = parameters + 1
  if (films - counted - 1 <= 0) return Infinity
  // Films without scatter would give minus infinity for every model that fits them: their rounding is the floor.
  return films * Math.log(Math.max(squares, 1e-18) / films) + 2 * counted + (2 * counted * (counted + 1)) / (films - counted - 1)
}

function compareOne(
  fit: FilmModelFit,
  line: { readonly squares: number; readonly aicc: number; readonly value: number; readonly degrees: number },
  depthMicrometres: number,
): ComparedModel {
  const films = fit.points.length
  const parameterCount = films - fit.degreesOfFreedom
  const aicc = aiccOf(films, parameterCount, fit.residualSumOfSquares)
  const answer = modelExposureForDepth(fit, depthMicrometres)
  return {
    kind: 'compared',
    model: fit.model,
    parameterCount,
    residualStandardDeviation: fit.residualStandardDeviation,
    degreesOfFreedom: fit.degreesOfFreedom,
    aicc,
    aiccChange: aicc === Infinity || line.aicc === Infinity ? Infinity : aicc - line.aicc,
    test: testAgainst(fit, line),
    answer: answer.kind === 'answered' ? { kind: 'answered', value: answer.value, interval: answer.meanInterval } : answer,
    changePercent: answer.kind === 'answered' ? 100 * (answer.value / line.value - 1) : null,
  }
}

/** Two equal depths make a straight line at the edge of the two-line model, where F does not hold: no test there. */
function testAgainst(fit: FilmModelFit, line: { readonly squares: number; readonly degrees: number }): ComparedModel['test'] {
  const numeratorDegreesOfFreedom = line.degrees - fit.degreesOfFreedom
  if (fit.model === 'two-line' || fit.degreesOfFreedom < 1 || numeratorDegreesOfFreedom < 1) return null
  const gain = Math.max(0, line.squares - fit.residualSumOfSquares) / numeratorDegreesOfFreedom
  const f = gain / (fit.residualSumOfSquares / fit.degreesOfFreedom)
  if (Number.isNaN(f)) return null
  return {
    f,
    numeratorDegreesOfFreedom,
    denominatorDegreesOfFreedom: fit.degreesOfFreedom,
    pValue: fUpperTail(f, numeratorDegreesOfFreedom, fit.degreesOfFreedom),
  }
}

function isClearlyBetter(model: ComparedModel): boolean {
  return model.aiccChange < clearly.aiccBelow && (model.test === null || model.test.pValue < clearly.pBelow)
}

const names: Readonly<Record<FilmModelName, string>> = {
  'straight-line': 'the straight line',
  'dead-time': 'the curve with a dead time',
  quadratic: 'the bent curve',
  'two-line': 'the curve for light of two kinds',
}

function sentenceFor(best: ComparedModel, depthMicrometres: number): string {
  if (best.model === 'straight-line') return 'No other curve is clearly better than the straight line: keep it.'
  const change = best.changePercent
  const effect = change === null
    ? `It does not reach ${depthMicrometres} µm.`
    : `It asks for ${Math.abs(change).toFixed(1)} % ${change < 0 ? 'less' : 'more'} exposure for ${depthMicrometres} µm.`
  return `The films follow ${names[best.model]} clearly better than the straight line. ${effect} Accept it or keep the straight line.`
}
