import type { Refused } from './types.ts'

/** A curve: takes its parameters, gives the value at x. */
export type NonlinearModel = (parameters: readonly number[]) => (x: number) => number

/** Its partial derivatives by each parameter, in the order of the parameters. */
export type NonlinearJacobian = (parameters: readonly number[]) => (x: number) => readonly number[]

export interface NonlinearFit {
  readonly kind: 'fitted'
  readonly parameters: readonly number[]
  /** Zero for a parameter that was held; infinite where no degree of freedom is left. */
  readonly standardErrors: readonly number[]
  /** (JᵀWJ)⁻¹ s², rows and columns of held parameters are zero. */
  readonly covariance: readonly (readonly number[])[]
  /** y minus the curve, not weighted. */
  readonly residuals: readonly number[]
  /** Weighted. */
  readonly residualSumOfSquares: number
  readonly degreesOfFreedom: number
  readonly residualStandardDeviation: number
  /** How far the fit still is from its optimum, in units of its own uncertainty (Bates & Watts); 1e-6 or less. */
  readonly relativeOffset: number
}

export type NonlinearRefusal = Refused<'too-few-points' | 'not-converged' | 'not-identified'>

export type NonlinearOutcome = NonlinearFit | NonlinearRefusal
