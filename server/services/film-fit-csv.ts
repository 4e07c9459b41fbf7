import { filmFitInputs } from '#shared/contracts/film-fit-inputs.ts'
import { compareLayerRules, type Estimate, type Interval, type LayerRuleChoice, type WorkingCurveFit } from '#shared/film/index.ts'
import { toCsv, type CsvValue } from '#shared/imports/index.ts'
import type { Study } from '#shared/contracts/studies.ts'
import { studyAnswer, type FilmFit, type StudyAnswer } from './film-fit.ts'

/** The rules of a layer with the study's own values; the far-side rule has no setting yet and takes its starting value. */
export const layerRulesOf = (film: Study['film']): readonly LayerRuleChoice[] => [
  { kind: 'constant-overcure', overcureMicrometres: film.overcureMicrometres },
  { kind: 'constant-ratio', ratio: film.depthRatio },
  'far-side-dose',
]

const header = ['quantity', 'unit', 'value', 'standard_error', 'interval_kind', 'lower', 'upper', 'remark'] as const

/** An interval that is not finite has no two ends: its kind stands alone, and an exclusive one names its roots in the remark. */
function intervalCells(interval: Interval): readonly [CsvValue, CsvValue, CsvValue] {
  const end = (value: number) => (Number.isFinite(value) ? value : null)
  return interval.kind === 'finite' ? [interval.kind, end(interval.lower), end(interval.upper)] : [interval.kind, null, null]
}

const intervalRemark = (interval: Interval) =>
  interval.kind === 'exclusive' ? `everything outside ${interval.roots[0]} to ${interval.roots[1]}` : interval.kind === 'unbounded' ? 'the films do not limit it' : null

const estimateRow = (quantity: string, unit: string, estimate: Estimate): readonly CsvValue[] =>
  [quantity, unit, estimate.value, estimate.standardError, ...intervalCells(estimate.interval), intervalRemark(estimate.interval)]

const numberRow = (quantity: string, unit: string, value: number): readonly CsvValue[] => [quantity, unit, value, null, null, null, null, null]

const modelRemark = ({ curve }: StudyAnswer) =>
  curve.name === 'straight-line' ? curve.name : `straight-line (the study answers with the ${curve.name} curve: see exposure_for_layer)`

/** What the study answers with. */
function answerRow({ curve, exposure }: StudyAnswer, exposureUnit: string): readonly CsvValue[] {
  const by = [`answer of this study, by the ${curve.name} curve`, curve.remark]
  if (exposure.kind === 'refused') return ['exposure_for_layer', exposureUnit, null, null, null, null, null, [...by, exposure.detail].filter(Boolean).join('; ')]
  const remarks = [...by, exposure.extrapolated ? 'outside the measured thicknesses' : null, intervalRemark(exposure.meanInterval)]
  return ['exposure_for_layer', exposureUnit, exposure.value, null, ...intervalCells(exposure.meanInterval), remarks.filter(Boolean).join('; ')]
}

function layerRows(study: Study, fit: WorkingCurveFit, exposureUnit: string): readonly (readonly CsvValue[])[] {
  const { byRule } = compareLayerRules(fit, { layerHeightMicrometres: study.layerHeightMicrometres, rules: layerRulesOf(study.film) })
  return byRule.flatMap(answer => {
    const remarks = [
      answer.rule.kind === study.film.layerRule ? 'rule of this study' : null,
      answer.extrapolated ? 'outside the measured thicknesses' : null,
      intervalRemark(answer.meanInterval),
    ].filter(remark => remark !== null)
    return [
      [`exposure_for_layer.${answer.rule.kind}`, exposureUnit, answer.value, null, ...intervalCells(answer.meanInterval), remarks.join('; ')],
      [`exposure_for_layer.${answer.rule.kind}.one_film`, exposureUnit, answer.value, null, ...intervalCells(answer.singleInterval), intervalRemark(answer.singleInterval)],
      numberRow(`cured_depth.${answer.rule.kind}`, 'micrometres', answer.depthMicrometres),
    ]
  })
}

/**
 * Parameters, answers and findings of a study's straight line as CSV, one quantity a row. A fit that was refused is one
 * row that says why.
 */
export function fitCsv(fit: FilmFit): string {
  const { study, outcome } = fit
  const exposureUnit = study.exposureKind === 'seconds' ? 'seconds' : 'mj_per_cm2'
  const provenance = [
    ['inputs_hash', 'sha256', null, null, null, null, null, fit.inputsHash],
    ['library_version', '', null, null, null, null, null, fit.libraryVersion],
  ]
  if (outcome.kind === 'refused') {
    return toCsv([header, ['refused', '', null, null, null, null, null, `${outcome.reason}: ${outcome.detail}`], ...provenance])
  }
  const answer = studyAnswer(study, filmFitInputs(study, fit.readings), outcome)
  const [[interceptVariance, covariance], [, slopeVariance]] = outcome.covariance
  return toCsv([
    header,
    ['model', '', null, null, null, null, null, modelRemark(answer)],
    estimateRow('penetration_depth', 'micrometres', outcome.penetrationDepthMicrometres),
    estimateRow('critical_exposure', exposureUnit, outcome.criticalExposure),
    estimateRow('intercept', 'micrometres', outcome.interceptMicrometres),
    numberRow('variance.intercept', 'square_micrometres', interceptVariance),
    numberRow('covariance.intercept_slope', 'square_micrometres', covariance),
    numberRow('variance.slope', 'square_micrometres', slopeVariance),
    numberRow('residual_standard_deviation', 'micrometres', outcome.residualStandardDeviation),
    numberRow('degrees_of_freedom', '', outcome.degreesOfFreedom),
    numberRow('r_squared', '', outcome.rSquared),
    numberRow('confidence_level', '', outcome.confidenceLevel),
    numberRow('films', '', outcome.filmCount),
    numberRow('exposures', '', outcome.levelCount),
    numberRow('measured_depth.lowest', 'micrometres', outcome.measuredRange.depthMicrometresMin),
    numberRow('measured_depth.highest', 'micrometres', outcome.measuredRange.depthMicrometresMax),
    answerRow(answer, exposureUnit),
    ...layerRows(study, outcome, exposureUnit),
    ...outcome.findings.map(finding => [`finding.${finding.code}`, '', null, null, null, null, null, `${finding.severity}: ${finding.sentence}`]),
    ...provenance,
  ])
}
