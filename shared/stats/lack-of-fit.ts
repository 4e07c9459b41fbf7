import { fUpperTail } from './quantiles.ts'

/** Splits what a fit leaves over into what replicates leave too and what the curve does not follow. */
export interface LackOfFit {
  readonly pureErrorSumOfSquares: number
  readonly pureErrorDegreesOfFreedom: number
  readonly lackOfFitSumOfSquares: number
  readonly lackOfFitDegreesOfFreedom: number
  readonly f: number
  readonly pValue: number
}

/**
 * F test of lack of fit against replicate error (Draper & Smith, Applied Regression Analysis, ch. 2; NIST/SEMATECH
 * e-Handbook 4.4.4.6).
 *
 * @param data.x - replicates share exactly the same x
 * @param data.parameters - of the fitted curve
 * @returns null without replicates, or without more levels than parameters: nothing to test with
 * @example
 * lackOfFit({ x: [1, 1, 2, 2, 3, 3], y, residualSumOfSquares, parameters: 2 })
 */
export function lackOfFit(data: {
  readonly x: readonly number[]
  readonly y: readonly number[]
  readonly weights?: readonly number[]
  readonly residualSumOfSquares: number
  readonly parameters: number
}): LackOfFit | null {
  const levels = new Map<number, { weight: number; sum: number; values: { y: number; weight: number }[] }>()
  for (const [i, x] of data.x.entries()) {
    const weight = data.weights?.[i] ?? 1
    const y = data.y[i] ?? 0
    const level = levels.get(x) ?? { weight: 0, sum: 0, values: [] }
    level.weight += weight
    level.sum += weight * y
    level.values.push({ y, weight })
    levels.set(x, level)
  }
  const pureErrorDegreesOfFreedom = data.x.length - levels.size
  const lackOfFitDegreesOfFreedom = levels.size - data.parameters
  if (pureErrorDegreesOfFreedom < 1 || lackOfFitDegreesOfFreedom < 1) return null
  let pureErrorSumOfSquares = 0
  for (const level of levels.values()) {
    const mean = level.sum / level.weight
    for (const { y, weight } of level.values) pureErrorSumOfSquares += weight * (y - mean) ** 2
  }
  const lackOfFitSumOfSquares = Math.max(0, data.residualSumOfSquares - pureErrorSumOfSquares)
  const f = lackOfFitSumOfSquares / lackOfFitDegreesOfFreedom / (pureErrorSumOfSquares / pureErrorDegreesOfFreedom)
  if (Number.isNaN(f)) return null
  return {
    pureErrorSumOfSquares,
    pureErrorDegreesOfFreedom,
    lackOfFitSumOfSquares,
    lackOfFitDegreesOfFreedom,
    f,
    pValue: fUpperTail(f, lackOfFitDegreesOfFreedom, pureErrorDegreesOfFreedom),
  }
}
