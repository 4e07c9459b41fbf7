import type { Estimate, Interval, Refused } from '../stats/types.ts'
import type { ExposureKind, WorkingCurveFit, WorkingCurveRefusal } from './types.ts'

/** One film as a model sees it. */
export interface ModelPoint {
  readonly exposure: number
  readonly depthMicrometres: number
  readonly weight: number
}

interface FilmModelBase {
  readonly kind: 'fitted'
  readonly exposureKind: ExposureKind
  readonly confidenceLevel: number
  readonly points: readonly ModelPoint[]
  /** One point for each exposure: mean depth and summed weight. */
  readonly levels: readonly ModelPoint[]
  /** What the solver worked with; its meaning is the model's own. */
  readonly coefficients: readonly number[]
  readonly covariance: readonly (readonly number[])[]
  /** Depth minus curve, in µm. */
  readonly residuals: readonly number[]
  /** Weighted. */
  readonly residualSumOfSquares: number
  readonly degreesOfFreedom: number
  readonly residualStandardDeviation: number
  readonly measuredRange: WorkingCurveFit['measuredRange']
}

/** depth = Dp ln((t − t0)/tc): the light comes t0 late, or the first t0 cures nothing. */
export interface DeadTimeFit extends FilmModelBase {
  readonly model: 'dead-time'
  readonly penetrationDepthMicrometres: Estimate
  /** tc: what must still follow after the dead time until the resin gels. */
  readonly criticalExposure: Estimate
  /** t0, in the unit of the exposures; below zero when the light stays on longer than told. */
  readonly deadTime: Estimate
}

/** depth = c0 + c1 u + c2 u², u = ln E − mean of ln E: any gentle bend, without a cause. */
export interface QuadraticFit extends FilmModelBase {
  readonly model: 'quadratic'
  readonly meanLogExposure: number
  /** c2 in µm: above zero the curve steepens. */
  readonly bendMicrometres: Estimate
  /** c1: the slope at the mean of ln E, in µm. */
  readonly slopeAtCentreMicrometres: Estimate
}

/** E (w e^(−z/D1) + (1 − w) e^(−z/D2)) = Ec: light of two kinds, one of which goes deeper. */
export interface TwoLineFit extends FilmModelBase {
  readonly model: 'two-line'
  readonly criticalExposure: Estimate
  /** The shallow and the deep one. */
  readonly penetrationDepthsMicrometres: readonly [Estimate, Estimate]
  /** Share of the light that goes shallow; without uncertainty where it was given. */
  readonly shallowShare: Estimate
}

export type FilmModelFit = DeadTimeFit | QuadraticFit | TwoLineFit

export type FilmModelRefusal =
  | WorkingCurveRefusal
  | Refused<'too-few-levels' | 'not-converged' | 'not-identified' | 'too-few-points' | 'rank-deficient' | 'too-few-rows'>

export interface ModelDepth {
  readonly exposure: number
  readonly depthMicrometres: number
  readonly confidenceInterval: Interval
  readonly extrapolated: boolean
}

export interface ModelExposure {
  readonly kind: 'answered'
  readonly depthMicrometres: number
  readonly value: number
  /** Exposures whose mean film may have the depth. */
  readonly meanInterval: Interval
  readonly extrapolated: boolean
}

export type ModelExposureOutcome = ModelExposure | Refused<'depth-not-reached'>
