import { tTwoSidedTail } from '../stats/quantiles.ts'
import type { Curvature, WorkingCurveFit } from './types.ts'

/**
 * Does adding (ln E)² to the line help? Needs no replicates.
 *
 * The squared term is made orthogonal to the line first, so that only residuals enter and no digits are lost.
 *
 * @returns null with fewer than three exposures or no degree of freedom left
 */
export function curvatureOf(fit: Pick<WorkingCurveFit, 'degreesOfFreedom' | 'levelCount' | 'centre' | 'points' | 'residualStandardDeviation'>): Curvature | null {
  const degreesOfFreedom = fit.degreesOfFreedom - 1
  if (degreesOfFreedom < 1 || fit.levelCount < 3) return null
  const { meanLogExposure, sumSquaresLogExposure, sumWeights } = fit.centre
  const x = fit.points.map(point => Math.log(point.exposure) - meanLogExposure)
  const meanSquare = sumSquaresLogExposure / sumWeights
  let cubes = 0
  for (const [i, point] of fit.points.entries()) cubes += point.weight * (x[i] ?? 0) ** 3
  const tilt = cubes / sumSquaresLogExposure
  let products = 0
  let squares = 0
  let least = Infinity
  let greatest = -Infinity
  const bendAt = (value: number): number => value * value - meanSquare - tilt * value
  for (const [i, point] of fit.points.entries()) {
    const value = bendAt(x[i] ?? 0)
    least = Math.min(least, x[i] ?? 0)
    greatest = Math.max(greatest, x[i] ?? 0)
    products += point.weight * value * point.residualMicrometres
    squares += point.weight * value * value
  }
  if (!(squares > 1e-12 * sumSquaresLogExposure)) return null
  const coefficient = products / squares
  const rest = fit.residualStandardDeviation ** 2 * fit.degreesOfFreedom - coefficient * products
  const standardError = Math.sqrt(Math.max(0, rest) / degreesOfFreedom / squares)
  if (!(standardError > 0)) return null
  const t = coefficient / standardError
  return {
    coefficient,
    standardError,
    t,
    degreesOfFreedom,
    pValue: tTwoSidedTail(t, degreesOfFreedom),
    thinEndMicrometres: coefficient * bendAt(least),
    thickEndMicrometres: coefficient * bendAt(greatest),
    turnLogExposure: meanLogExposure + tilt / 2 + Math.sqrt(tilt * tilt / 4 + meanSquare),
  }
}
