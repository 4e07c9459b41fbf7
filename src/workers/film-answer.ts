import { filmFitInputs, layerRuleOf } from '#shared/contracts/film-fit-inputs.ts'
import type { FilmSettings } from '#shared/contracts/studies.ts'
import {
  acceptedCurve, answerFindings, compareLayerRules, curveExposureForLayer, depthAt, exposureOnPrinter, fitWorkingCurve, implausibleReadings,
  type AcceptedCurve, type Finding, type WorkingCurveFit, type WorkingCurveOptions,
} from '#shared/film/index.ts'
import { curveSamples } from './film-curves.ts'
import type { ChartPoint, CurrentReading, CurveSample, FilmAnswer, FilmQuestion, LayerAnswers, ReadingCounts } from './film-answer-types.ts'

/** More dots than this cover each other and cost the page its speed. */
const chartPointsMax = 400
const samples = 72

/** The inputs of the fit: the same on the server, to the last digit. */
export function filmInputs(question: FilmQuestion, readings: readonly CurrentReading[]): WorkingCurveOptions {
  return filmFitInputs({ exposureKind: question.exposureKind, film: question.film }, readings)
}

export const rulesOf = (film: FilmSettings) => [
  { kind: 'constant-overcure', overcureMicrometres: film.overcureMicrometres },
  { kind: 'constant-ratio', ratio: film.depthRatio },
  { kind: 'far-side-dose' },
] as const

/**
 * Everything the page shows that follows a keystroke: the line, its answers and what to know about them.
 *
 * @returns the answer, and the fit itself for the questions that come after
 */
export function filmAnswer(question: FilmQuestion, readings: readonly CurrentReading[]): { readonly answer: FilmAnswer; readonly fit: WorkingCurveFit | null } {
  const inputs = filmInputs(question, readings)
  const implausible = implausibleReadings(inputs.readings).map(({ index, sentence }) => ({ id: readings[index]?.id ?? '', sentence }))
  const base = { counts: countsOf(readings), implausible, ...chartPoints(readings, new Set(implausible.map(({ id }) => id))) }
  const straight = fitWorkingCurve(inputs)
  if (straight.kind === 'refused') return { answer: { ...base, kind: 'refused', reason: straight.reason, detail: straight.detail }, fit: null }
  const curve = acceptedCurve(inputs, straight, question.film)
  const heights = [question.layerHeightMicrometres, ...(question.otherLayerHeightMicrometres === null ? [] : [question.otherLayerHeightMicrometres])]
  const layers = heights.map(height => layerAnswers(curve, straight, height, question))
  const headline = headlineOf(curve, straight, question)
  const exposures = sampledExposures(straight, question, 'kind' in headline ? null : headline.value)
  return {
    fit: straight,
    answer: {
      ...base,
      kind: 'fitted',
      numbers: {
        penetrationDepth: curve.name === 'with-missing-films' ? curve.fit.penetrationDepthMicrometres : straight.penetrationDepthMicrometres,
        criticalExposure: curve.name === 'with-missing-films' ? curve.fit.criticalExposure : straight.criticalExposure,
        residualStandardDeviation: straight.residualStandardDeviation, degreesOfFreedom: straight.degreesOfFreedom, rSquared: straight.rSquared,
        filmCount: straight.filmCount, levelCount: straight.levelCount, measuredRange: straight.measuredRange,
      },
      curve: curve.name,
      curveRemark: curve.remark,
      headline,
      layers,
      line: straightSamples(straight, exposures),
      otherLine: curveSamples(curve, exposures),
      findings: findingsOf(straight, layers[0], question),
    },
  }
}

function countsOf(readings: readonly CurrentReading[]): ReadingCounts {
  let [measured, missing, excluded] = [0, 0, 0]
  for (const { state } of readings) {
    if (state === 'measured') measured++
    else if (state === 'excluded') excluded++
    else missing++
  }
  return { measured, missing, excluded }
}

function chartPoints(readings: readonly CurrentReading[], marked: ReadonlySet<string>): { points: readonly ChartPoint[]; pointsLeftOff: number } {
  const stride = Math.max(1, Math.ceil(readings.length / chartPointsMax))
  // An odd film must be seen, however many there are.
  const chosen = stride === 1 ? readings : readings.filter((reading, i) => i % stride === 0 || marked.has(reading.id))
  const again = Math.ceil(chosen.length / (2 * chartPointsMax))
  const shown = again <= 1 ? chosen : chosen.filter((_, i) => i % again === 0)
  return {
    points: shown.map(({ id, exposure, depthMicrometres, state }) => ({ id, exposure, depth: depthMicrometres ?? 0, state, marked: marked.has(id) })),
    pointsLeftOff: readings.length - shown.length,
  }
}

/** Every rule by the accepted curve; a rule that this curve cannot answer says why and has the straight line's numbers. */
function layerAnswers(curve: AcceptedCurve, straight: WorkingCurveFit, layerHeightMicrometres: number, { film, printer }: FilmQuestion): LayerAnswers {
  const { byRule, sentence } = compareLayerRules(straight, { layerHeightMicrometres, rules: rulesOf(film) })
  return {
    layerHeightMicrometres,
    sentence: curve.name === 'straight-line' ? sentence : `By the straight line: ${sentence}`,
    byRule: byRule.map(line => {
      const answer = curveExposureForLayer(curve, straight, { layerHeightMicrometres, rule: line.rule })
      const { rule } = line
      if (answer.kind === 'refused') return { ...line, ...exposureOnPrinter(line.value, printer), rule, refusal: answer.detail }
      return { ...answer, ...exposureOnPrinter(answer.value, printer), rule, refusal: null }
    }),
  }
}

function headlineOf(curve: AcceptedCurve, straight: WorkingCurveFit, question: FilmQuestion): Extract<FilmAnswer, { kind: 'fitted' }>['headline'] {
  const { layerHeightMicrometres, printer } = question
  const answer = curveExposureForLayer(curve, straight, { layerHeightMicrometres, rule: layerRuleOf(question.film) })
  if (answer.kind === 'refused') return answer
  // The page tells a refusal by its kind.
  const { kind: _answered, ...shown } = answer
  return { ...shown, ...exposureOnPrinter(answer.value, printer) }
}

/** From below the thinnest film (where the curve starts) to beyond the thickest. */
function sampledExposures(fit: WorkingCurveFit, question: FilmQuestion, headline: number | null): readonly number[] {
  const plan = question.film.plan?.exposures ?? []
  const { exposureMin, exposureMax } = fit.measuredRange
  const reachable = (value: number) => value > exposureMin / 4 && value < exposureMax * 4
  const also = [fit.criticalExposure.value, ...(headline === null ? [] : [headline]), ...plan].filter(reachable)
  const low = Math.min(exposureMin, ...also) / 1.1
  const high = Math.max(exposureMax, ...also) * 1.15
  return Array.from({ length: samples }, (_, i) => low * (high / low) ** (i / (samples - 1)))
}

function straightSamples(fit: WorkingCurveFit, exposures: readonly number[]): readonly CurveSample[] {
  return exposures.map(exposure => {
    const { depthMicrometres, confidenceInterval: confidence, predictionInterval: prediction } = depthAt(fit, exposure)
    return {
      exposure, depth: depthMicrometres,
      confidence: confidence.kind === 'finite' ? [confidence.lower, confidence.upper] : null,
      prediction: prediction.kind === 'finite' ? [prediction.lower, prediction.upper] : null,
    }
  })
}

function findingsOf(fit: WorkingCurveFit, layer: LayerAnswers | undefined, question: FilmQuestion): readonly Finding[] {
  const answer = layer?.byRule.find(({ rule }) => rule.kind === question.film.layerRule)
  const about = answer === undefined ? [] : answerFindings(fit, { ...answer, singleInterval: answer.singleInterval ?? { kind: 'unbounded' } })
  const seen = new Set<string>()
  return [...about, ...fit.findings].filter(({ code, sentence }) => {
    if (seen.has(code + sentence)) return false
    seen.add(code + sentence)
    return true
  })
}
