import { countLogLikelihood, interpolateEta } from '../window/index.ts'
import type { PlannerPrior, ReadPrint } from './types.ts'

/** Standard-normal coordinates of a particle: centre, window, the two slopes, the coarse shift. */
export const coordinateCount = 5

/** The curves that a particle stands for. */
export interface WindowCurves {
  /** ln exposure at which half of the must-form features form. */
  formEdge: number
  /** ln exposure at which half of the must-stay-open features stay open. */
  openEdge: number
  formSlope: number
  openSlope: number
  coarseShift: number
}

/** Turns standard-normal coordinates into curves; the cubic term makes the tails of a claimed guess heavy. */
export function curvesOf(prior: PlannerPrior, z: Float64Array, at: number): WindowCurves {
  const z1 = z[at] ?? 0
  const centre = Math.log(prior.guess) + prior.guessLogSd * z1 * (1 + 0.1 * z1 * z1)
  const logRatio = prior.windowLogRatioMedian * Math.exp(prior.windowLogRatioLogSd * (z[at + 1] ?? 0))
  return {
    formEdge: centre - logRatio / 2,
    openEdge: centre + logRatio / 2,
    formSlope: prior.slopeMedian * Math.exp(prior.slopeLogSd * (z[at + 2] ?? 0)),
    openSlope: prior.slopeMedian * Math.exp(prior.slopeLogSd * (z[at + 3] ?? 0)),
    coarseShift: prior.coarseBiasSd * (z[at + 4] ?? 0),
  }
}

/** A read print with its tables looked up once. */
export interface PreparedPrint {
  readonly logExposure: number
  readonly coarse: boolean
  readonly slopeShare: number
  readonly form: Float64Array | null
  readonly open: Float64Array | null
}

export function preparePrint(print: ReadPrint): PreparedPrint {
  const { coupon } = print
  const table = (count: { passed: number; total: number }) =>
    count.total === 0 ? null : countLogLikelihood({ ...count, spread: coupon.printSpread, misreadShare: coupon.misreadShare })
  return {
    logExposure: Math.log(print.exposure),
    coarse: coupon.coarse,
    slopeShare: coupon.slopeShare,
    form: table(print.mustForm),
    open: table(print.mustStayOpen),
  }
}

/** ln likelihood of one print under the curves of a particle. */
export function printLogLikelihood(print: PreparedPrint, curves: WindowCurves): number {
  const shift = print.coarse ? curves.coarseShift : 0
  const x = print.logExposure - shift
  let value = 0
  if (print.form !== null) value += interpolateEta(print.form, print.slopeShare * curves.formSlope * (x - curves.formEdge))
  if (print.open !== null) value += interpolateEta(print.open, print.slopeShare * curves.openSlope * (curves.openEdge - x))
  return value
}
