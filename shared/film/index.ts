/** Film: the working curve from cured-film thicknesses, and what it says about exposures. */

// The curve
export { fitWorkingCurve, type WorkingCurveOptions } from './fit-working-curve.ts'
export { workingCurveWithout } from './working-curve-without.ts'
export { answerFindings } from './answer-findings.ts'
export { depthAt, type DepthAt } from './depth-at.ts'
export { exposureForDepth } from './exposure-for-depth.ts'
export { curvatureOf } from './curvature.ts'
export { implausibleReadings, type Implausible } from './implausible-readings.ts'

// Layers
export { compareLayerRules, exposureForLayer, type ExposureForLayer, type LayerRuleComparison } from './exposure-for-layer.ts'
export { exposureFromProven, type ExposureFromProven } from './exposure-from-proven.ts'
export { defaultRuleValues, type CompleteRule, type LayerRuleChoice } from './layer-rules.ts'
export { printThrough, type PrintThrough } from './print-through.ts'

// Planning and comparing
export { planFilmExposures, type FilmPlan, type GaugeVerdict } from './plan-film-exposures.ts'
export { compareWorkingCurves, type ComparisonOutcome, type PotencyComparison } from './compare-working-curves.ts'

/** Changes when the same readings would give other digits: kept with every stored fit. */
export const filmLibraryVersion = 'film-1'

export type {
  Curvature, ExposureForDepth, ExposureKind, FilmPoint, FilmReading, FilmReadingState, FilmWeighting, Finding, FindingSeverity,
  LayerRule, LayerRuleName, WorkingCurveFit, WorkingCurveOutcome, WorkingCurveRefusal,
} from './types.ts'
export type { Estimate, Interval } from '../stats/types.ts'

// Other curves
export { fitDeadTimeCurve } from './fit-dead-time-curve.ts'
export { fitQuadraticCurve } from './fit-quadratic-curve.ts'
export { fitTwoLineAttenuation, type TwoLineOptions } from './fit-two-line-attenuation.ts'
export { modelDepthAt, modelExposureForDepth } from './film-model-answers.ts'
export { compareFilmModels, type ComparedModel, type FilmModelComparison, type FilmModelName } from './compare-film-models.ts'
export type {
  DeadTimeFit, FilmModelFit, FilmModelRefusal, ModelDepth, ModelExposure, ModelExposureOutcome, ModelPoint, QuadraticFit, TwoLineFit,
} from './film-model-types.ts'

// The curve that a study answers with, and what a printer can do of the answer
export {
  acceptedCurve, curveExposure, curveExposureForLayer, missingFilmLimit, withMissingFilms,
  type AcceptedCurve, type CurveChoice, type CurveExposure, type CurveExposureOutcome,
} from './accepted-curve.ts'
export { exposureOnPrinter, type ExposureOnPrinter, type PrinterLimits } from './exposure-on-printer.ts'

// Films that are far off, uncertain in exposure, or missing
export { fitRobustWorkingCurve, type RobustWorkingCurve, type RobustWorkingCurveOutcome } from './fit-robust-working-curve.ts'
export { fitWorkingCurveYork, type YorkWorkingCurve, type YorkWorkingCurveOptions, type YorkWorkingCurveOutcome } from './fit-working-curve-york.ts'
export { censoredExposureForDepth, fitCensoredWorkingCurve, type CensoredWorkingCurve, type CensoredWorkingCurveOutcome } from './fit-censored-working-curve.ts'
