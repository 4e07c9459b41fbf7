import { solveSmallSystem } from './small-system.ts'
import { tobitDerivatives, tobitLogLikelihood, type TobitRow } from './tobit-likelihood.ts'
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
  let value = tobitLogLikelihood(rows, place)
  for (let step = 0; step < 200; step++) {
    const { gradient, information } = tobitDerivatives(rows, place)
    const move = solveSmallSystem(information, gradient)
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

function halve(rows: readonly TobitRow[], place: readonly number[], move: readonly number[], value: number) {
  for (let share = 1; share > 1e-10; share /= 2) {
    const next = place.map((part, k) => part + share * (move[k] ?? 0))
    const there = tobitLogLikelihood(rows, next)
    if (there > value) return { place: next, value: there }
  }
  return null
}

function describe(rows: readonly TobitRow[], place: readonly number[], value: number, size: number): TobitOutcome {
  const columns = place.length - 1
  const inverse = place[columns] ?? 1
  const { information } = tobitDerivatives(rows, place)
  const inside = place.map((_, k) => solveSmallSystem(information, place.map((__, i) => (i === k ? 1 : 0))) ?? [])
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
