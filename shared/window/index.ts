/** The response of features to exposure, and the window between two edges. */

// Response curves for the record
export { fitResponse, type ResponseFit, type ResponseOutcome } from './fit-response.ts'
export { exposureAt, type ExposureAtShare, type SidedInterval } from './exposure-at.ts'

// What a person acts on
export { edgePosterior } from './edge-posterior.ts'
export { EdgePosterior } from './edge-distribution.ts'
export type { CurveDraws, EdgeBelief, ShareBand } from './edge-belief.ts'
export { gradedEdge, type GradedEdge } from './graded-edge.ts'
export { detailLimit, type DetailLimit } from './detail-limit.ts'
export { checkPrints, type PrintCheck } from './check-prints.ts'
export { defaultEdgePrior, type EdgePrior } from './edge-prior.ts'
export { defaultWindowTarget, findWindow, type WindowEdge, type WindowOutcome, type WindowTarget } from './find-window.ts'
export type { StepChance } from './joint-at-steps.ts'

// Pieces that the planner shares
export { countLogLikelihood, etaCount, etaLimit, etaStep, interpolateEta } from './count-likelihood.ts'

export type { BinomialLink, FeatureKind, Separation, Tally } from './types.ts'
