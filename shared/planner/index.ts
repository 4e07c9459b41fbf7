/** The next print: which coupon at which exposure tells most per minute, and when to stop. */
export { advise, lossLimits, type Advice, type AdviceOptions, type Care, type PrintOption } from './advise.ts'
export { beliefAfter, startBelief, updateBelief, type WindowBelief } from './particles.ts'
export { bestStepOf, jointShareAt, summariseSteps, type StepSummary } from './best-steps.ts'
export { informationGain } from './information-gain.ts'
export { curvesOf, type WindowCurves } from './window-model.ts'
export { defaultPlannerPrior, type PlannedCoupon, type PlannerPrior, type ReadPrint } from './types.ts'
