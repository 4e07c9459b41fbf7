import { normalUpperTail } from './quantiles.ts'
import { StatsError, type Refused } from './types.ts'

/** A linear model some of whose responses are only known to lie below a limit. */
export interface TobitFit {
  readonly kind: 'fitted'
  readonly coefficients: readonly number[]
  /** Maximum likelihood: divides by the number of responses, not by the degrees of freedom. */
  readonly sigma: number
  readonly logLikelihood: number
  /** Of (coefficients, sigma), from the observed information. */
  readonly covariance: readonly (readonly number[])[]
}

export type TobitOutcome = TobitFit | Refused<'too-few-measured' | 'no-scatter' | 'not-converged'>

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

/**
 * Maximum likelihood for responses of which some are left-censored (Tobin, Econometrica 26 (1958) 24).
 *
 * In (coefficients/σ, 1/σ) the likelihood is concave (Olsen, Econometrica 46 (1978) 1211), so Newton's steps with
 * halving find its one maximum or run away, which is refused.
 *
 * @param data.response - value, or the limit where `censored`
 * @throws {StatsError} `length-mismatch`
 * @example
 * fitTobit({ design: [[1, 0], [1, 1], [1, 2], [1, 3]], response: [0.2, 1.1, 1.9, 3.1], censored: [true, false, false, false] })
 */
export function fitTobit(data: {
  readonly design: readonly (readonly number[])[]
  readonly response: readonly number[]
  readonly censored: readonly boolean[]
}): TobitOutcome {
  const { design, response, censored } = data
  if (design.length !== response.length || censored.length !== response.length) {
    throw new StatsError('length-mismatch', `${response.length} responses, ${design.length} rows, ${censored.length} marks`)
  }
  const columns = design[0]?.length ?? 0
  const measured = censored.filter(isCensored => !isCensored).length
  if (measured <= columns) {
    return { kind: 'refused', reason: 'too-few-measured', detail: `${columns} coefficients and a scatter need more than ${columns} measured values, got ${measured}.` }
  }
  const size = response.reduce((most, value) => Math.max(most, Math.abs(value)), 0) || 1
  const rows = design.map((row, i) => ({ row, y: (response[i] ?? 0) / size, isCensored: censored[i] === true }))
  // From σ as large as the responses: there the likelihood is smooth and every pull is mild.
  let place: number[] = [...new Array<number>(columns).fill(0), 1]
  let value = logLikelihoodAt(rows, place)
  for (let step = 0; step < 200; step++) {
    const { gradient, information } = derivativesAt(rows, place)
    const move = solve(information, gradient)
    if (move === null) return { kind: 'refused', reason: 'not-converged', detail: 'The measured and the missing films leave the line open.' }
    const decrement = move.reduce((sum, part, k) => sum + part * (gradient[k] ?? 0), 0)
    if (decrement < 1e-20) return describe(rows, place, value, size)
    const next = halve(rows, place, move, value)
    // No step is better any more: at the last digit, or lost.
    if (next === null) {
      return decrement < 1e-9
        ? describe(rows, place, value, size)
        : { kind: 'refused', reason: 'not-converged', detail: 'The likelihood has no clear maximum.' }
    }
    place = next.place
    value = next.value
    if ((place[columns] ?? 0) > 1e9) return { kind: 'refused', reason: 'no-scatter', detail: 'The measured values lie on the line to the last digit: there is no scatter to weigh the missing ones by.' }
  }
  return { kind: 'refused', reason: 'not-converged', detail: 'The likelihood runs away: the line is open on one side.' }
}

interface Row {
  readonly row: readonly number[]
  readonly y: number
  readonly isCensored: boolean
}

/** Distance from the line in units of σ. */
function distance({ row, y }: Row, place: readonly number[]): number {
  return row.reduce((sum, value, k) => sum - value * (place[k] ?? 0), (place[row.length] ?? 0) * y)
}

function logLikelihoodAt(rows: readonly Row[], place: readonly number[]): number {
  const inverse = place[place.length - 1] ?? 0
  if (!(inverse > 0)) return -Infinity
  let sum = 0
  for (const one of rows) {
    const z = distance(one, place)
    sum += one.isCensored ? logNormalBelow(z) : Math.log(inverse) - 0.5 * z * z - logRootTwoPi
  }
  return sum
}

function derivativesAt(rows: readonly Row[], place: readonly number[]) {
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

function halve(rows: readonly Row[], place: readonly number[], move: readonly number[], value: number) {
  for (let share = 1; share > 1e-10; share /= 2) {
    const next = place.map((part, k) => part + share * (move[k] ?? 0))
    const there = logLikelihoodAt(rows, next)
    if (there > value) return { place: next, value: there }
  }
  return null
}

/** Gaussian elimination of a small symmetric system; null where it is singular. */
function solve(matrix: readonly (readonly number[])[], right: readonly number[]): number[] | null {
  const rows = matrix.map((row, i) => [...row, right[i] ?? 0])
  const size = right.length
  for (let k = 0; k < size; k++) {
    const pivot = rows.slice(k).reduce((best, row) => (Math.abs(row[k] ?? 0) > Math.abs(best[k] ?? 0) ? row : best))
    if (!(Math.abs(pivot[k] ?? 0) > 1e-280)) return null
    rows.splice(rows.indexOf(pivot), 1)
    rows.splice(k, 0, pivot)
    for (const [i, row] of rows.entries()) {
      if (i === k) continue
      const factor = (row[k] ?? 0) / (pivot[k] ?? 1)
      for (let j = k; j <= size; j++) row[j] = (row[j] ?? 0) - factor * (pivot[j] ?? 0)
    }
  }
  return rows.map((row, k) => (row[size] ?? 0) / (row[k] ?? 1))
}

function describe(rows: readonly Row[], place: readonly number[], value: number, size: number): TobitOutcome {
  const columns = place.length - 1
  const inverse = place[columns] ?? 1
  const { information } = derivativesAt(rows, place)
  const inside = place.map((_, k) => solve(information, place.map((__, i) => (i === k ? 1 : 0))) ?? [])
  // coefficient = γ/θ, σ = 1/θ, both in units of `size`.
  const jacobian = place.map((part, k) => place.map((_, j) => {
    if (k === columns) return j === columns ? -1 / inverse ** 2 : 0
    return j === k ? 1 / inverse : j === columns ? -part / inverse ** 2 : 0
  }))
  const covariance = jacobian.map(a => jacobian.map(b => size * size * a.reduce((sum, left, i) => sum + left * b.reduce((inner, right, j) => inner + right * (inside[j]?.[i] ?? 0), 0), 0)))
  const measured = rows.filter(one => !one.isCensored).length
  return {
    kind: 'fitted',
    coefficients: place.slice(0, columns).map(part => (size * part) / inverse),
    sigma: size / inverse,
    logLikelihood: value - measured * Math.log(size),
    covariance,
  }
}
