import { normalUpperTail } from './quantiles.ts'

const logRootTwoPi = 0.9189385332046727

/** ln of the chance of a standard normal below z, with digits also far in the tail (Abramowitz & Stegun 26.2.12). */
function logNormalBelow(z: number): number {
  if (z > -30) return Math.log(normalUpperTail(-z))
  return -0.5 * z * z - logRootTwoPi - Math.log(-z) + Math.log1p(-1 / (z * z) + 3 / z ** 4)
}

/** Density over chance below: the pull of a censored response. */
function pull(z: number): number {
  return Math.exp(-0.5 * z * z - logRootTwoPi - logNormalBelow(z))
}

/** One response: known, or only known to lie below `y`. */
export interface TobitRow {
  readonly row: readonly number[]
  readonly y: number
  readonly isCensored: boolean
}

/** Distance from the line in units of σ. */
function distance({ row, y }: TobitRow, place: readonly number[]): number {
  return row.reduce((sum, value, k) => sum - value * (place[k] ?? 0), (place[row.length] ?? 0) * y)
}

/** Log likelihood at (coefficients/σ, 1/σ); minus infinity outside its domain. */
export function tobitLogLikelihood(rows: readonly TobitRow[], place: readonly number[]): number {
  const inverse = place[place.length - 1] ?? 0
  if (!(inverse > 0)) return -Infinity
  let sum = 0
  for (const one of rows) {
    const z = distance(one, place)
    sum += one.isCensored ? logNormalBelow(z) : Math.log(inverse) - 0.5 * z * z - logRootTwoPi
  }
  return sum
}

/** Gradient and observed information at (coefficients/σ, 1/σ). */
export function tobitDerivatives(rows: readonly TobitRow[], place: readonly number[]) {
  const size = place.length
  const inverse = place[size - 1] ?? 1
  const gradient = new Array<number>(size).fill(0)
  const information = Array.from({ length: size }, () => new Array<number>(size).fill(0))
  const add = (list: number[] | undefined, k: number, by: number): void => {
    if (list !== undefined) list[k] = (list[k] ?? 0) + by
  }
  for (const one of rows) {
    const z = distance(one, place)
    const byPlace = [...one.row.map(value => -value), one.y]
    const force = one.isCensored ? pull(z) : -z
    const stiffness = one.isCensored ? force * (force + z) : 1
    for (const [i, a] of byPlace.entries()) {
      add(gradient, i, force * a)
      for (const [j, b] of byPlace.entries()) add(information[i], j, stiffness * a * b)
    }
    if (!one.isCensored) {
      add(gradient, size - 1, 1 / inverse)
      add(information[size - 1], size - 1, 1 / inverse ** 2)
    }
  }
  return { gradient, information }
}
