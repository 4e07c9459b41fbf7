import {
  censoredExposureForDepth, compareFilmModels, exposureForDepth, fitRobustWorkingCurve, missingFilmLimit, withMissingFilms, workingCurveWithout, type WorkingCurveFit,
} from '#shared/film/index.ts'
import { filmInputs } from './film-answer.ts'
import type { ComparisonsAnswer, CurrentReading, FilmComparisons, FilmQuestion } from './film-answer-types.ts'

/** Beyond this the bent curves take seconds, and with so many films the straight line's findings tell all there is. */
const readingsMax = 5000

/** The other curves, the robust fit, the fit without an outlier and the fit with missing films, at one depth. */
export function filmComparisons(question: FilmQuestion, readings: readonly CurrentReading[], depthMicrometres: number): ComparisonsAnswer {
  if (readings.length > readingsMax) return { kind: 'refused', detail: `Other curves are compared for up to ${readingsMax} readings; this study has ${readings.length}.` }
  const inputs = filmInputs(question, readings)
  const compared = compareFilmModels({ ...inputs, depthMicrometres })
  if (compared.kind === 'refused') return compared
  const line = compared.straightLine
  return {
    kind: 'compared',
    depthMicrometres,
    models: compared.models.map(model => model.kind === 'refused'
      ? { model: model.model, refusal: model.detail, residualStandardDeviation: null, aiccChange: null, pValue: null, value: null, interval: null, changePercent: null }
      : {
          model: model.model, refusal: model.answer.kind === 'refused' ? model.answer.detail : null, residualStandardDeviation: model.residualStandardDeviation,
          aiccChange: Number.isFinite(model.aiccChange) ? model.aiccChange : null, pValue: model.test?.pValue ?? null,
          value: model.answer.kind === 'answered' ? model.answer.value : null, interval: model.answer.kind === 'answered' ? model.answer.interval : null,
          changePercent: model.changePercent,
        }),
    preferred: compared.preferred,
    sentence: compared.sentence,
    robust: robustOf(inputs, depthMicrometres),
    withoutOutlier: withoutOutlier(inputs, line, { depthMicrometres, readings }),
    withMissing: missingOf(inputs, line, depthMicrometres),
  }
}

type Inputs = ReturnType<typeof filmInputs>

function robustOf(inputs: Inputs, depthMicrometres: number): FilmComparisons['robust'] {
  const { weighting: _weighting, ...rest } = inputs
  const robust = fitRobustWorkingCurve({ ...rest, depthMicrometres })
  if (robust.kind === 'refused') return null
  const value = robust.answers[0]?.robust ?? robust.criticalExposure.value
  return { differs: robust.differs, sentence: robust.sentence, penetrationDepth: robust.penetrationDepthMicrometres, criticalExposure: robust.criticalExposure, value }
}

function withoutOutlier(inputs: Inputs, line: WorkingCurveFit, context: { readonly depthMicrometres: number; readonly readings: readonly CurrentReading[] }): FilmComparisons['withoutOutlier'] {
  const indexes = line.findings.find(finding => finding.code === 'outlier')?.readingIndexes
  if (indexes === undefined || indexes.length === 0) return null
  const fit = workingCurveWithout(inputs, indexes)
  if (fit.kind === 'refused') return null
  const answer = exposureForDepth(fit, context.depthMicrometres)
  return {
    penetrationDepth: fit.penetrationDepthMicrometres, criticalExposure: fit.criticalExposure, value: answer.value, interval: answer.meanInterval,
    readingIds: indexes.flatMap(index => context.readings[index]?.id ?? []),
  }
}

function missingOf(inputs: Inputs, line: WorkingCurveFit, depthMicrometres: number): FilmComparisons['withMissing'] {
  if (line.censoredIndexes.length === 0) return null
  const fit = withMissingFilms(inputs, line)
  if (fit.kind === 'refused') return { refusal: fit.detail }
  const answer = censoredExposureForDepth(fit, depthMicrometres)
  return { penetrationDepth: fit.penetrationDepthMicrometres, criticalExposure: fit.criticalExposure, value: answer.value, interval: answer.meanInterval, limitMicrometres: missingFilmLimit(line) }
}
