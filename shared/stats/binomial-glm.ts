import { linkPoint, type BinomialLink, type LinkPoint } from './binomial-link.ts'
import { factorCholesky, type Cholesky } from './cholesky.ts'

/** Grouped pass/fail data: row i is `passed[i]` of `total[i]` trials at the covariates `design[i]`. */
export interface BinomialData {
  readonly design: readonly (readonly number[])[]
  readonly passed: readonly number[]
  readonly total: readonly number[]
  /** Known part of the linear predictor; zero where absent. */
  readonly offset?: readonly number[]
}

/** An affine set of coefficients. */
export interface CoefficientPlane {
  readonly base: readonly number[]
  readonly basis: readonly (readonly number[])[]
}

export interface BinomialGlmOptions {
  readonly link: BinomialLink
  /** `ml`: maximum likelihood. `firth`: likelihood times the root of the information determinant (Jeffreys). */
  readonly method: 'ml' | 'firth'
  /**
   * Keeps the coefficients on the line or plane `base + Σ free[k] · basis[k]`: a profile needs that. The penalty keeps
   * the information of all columns (Heinze & Schemper 2002).
   */
  readonly within?: CoefficientPlane
  /** First values of the free parameters. */
  readonly start?: readonly number[]
}

export interface BinomialGlmFit {
  readonly kind: 'fitted'
  readonly coefficients: readonly number[]
  /** The coefficients again, or where they lie on the plane of `within`. */
  readonly free: readonly number[]
  /** Inverse expected information of all columns. */
  readonly covariance: readonly (readonly number[])[]
  /** Without the binomial constants. */
  readonly logLikelihood: number
  /** `logLikelihood`, plus half the log determinant of the information where the method is Firth's. */
  readonly objective: number
  readonly fitted: readonly number[]
  readonly leverages: readonly number[]
  readonly iterations: number
}

export type BinomialGlmOutcome = BinomialGlmFit | { readonly kind: 'refused'; readonly reason: 'singular' | 'not-converged'; readonly detail: string }

interface State {
  readonly points: readonly LinkPoint[]
  readonly weights: readonly number[]
  readonly factor: Cholesky
  readonly information: readonly (readonly number[])[]
  readonly logLikelihood: number
  readonly objective: number
}

const iterationsMax = 200
/** Newton decrement, twice the rise in log likelihood that is still to be had: far below any digit that is shown. */
const convergedBelow = 1e-22
/** Where rounding keeps the objective from rising, this little slope is none. */
const flatBelow = 1e-14

function evaluate(data: BinomialData, options: BinomialGlmOptions, coefficients: readonly number[]): State | null {
  const size = coefficients.length
  const information = Array.from({ length: size }, () => new Array<number>(size).fill(0))
  const points: LinkPoint[] = []
  const weights: number[] = []
  let logLikelihood = 0
  for (const [i, row] of data.design.entries()) {
    let eta = data.offset?.[i] ?? 0
    for (let j = 0; j < size; j++) eta += (row[j] ?? 0) * (coefficients[j] ?? 0)
    const point = linkPoint(options.link, eta)
    const passed = data.passed[i] ?? 0
    const total = data.total[i] ?? 0
    if (passed > 0) logLikelihood += passed * point.logPass
    if (total > passed) logLikelihood += (total - passed) * point.logFail
    // Written as a product of two ratios so that neither tail underflows before it must.
    const weight = total * (point.slope / point.pass) * (point.slope / point.fail)
    points.push(point)
    weights.push(Number.isFinite(weight) ? weight : 0)
    for (let j = 0; j < size; j++) {
      for (let k = 0; k <= j; k++) {
        const target = information[j]
        if (target !== undefined) target[k] = (target[k] ?? 0) + (weights[i] ?? 0) * (row[j] ?? 0) * (row[k] ?? 0)
      }
    }
  }
  for (let j = 0; j < size; j++) for (let k = 0; k < j; k++) (information[k] ?? [])[j] = information[j]?.[k] ?? 0
  const factor = factorCholesky(information)
  if (factor === null) return null
  const objective = logLikelihood + (options.method === 'firth' ? 0.5 * factor.logDeterminant : 0)
  return { points, weights, factor, information, logLikelihood, objective }
}

function leveragesOf(data: BinomialData, state: State): number[] {
  return data.design.map((row, i) => {
    const solved = state.factor.solve(row)
    return (state.weights[i] ?? 0) * row.reduce((sum, value, j) => sum + value * (solved[j] ?? 0), 0)
  })
}

function scoreOf(data: BinomialData, options: BinomialGlmOptions, state: State): number[] {
  const size = data.design[0]?.length ?? 0
  const score = new Array<number>(size).fill(0)
  const leverages = options.method === 'firth' ? leveragesOf(data, state) : null
  for (const [i, row] of data.design.entries()) {
    const point = state.points[i]
    if (point === undefined) continue
    const passed = data.passed[i] ?? 0
    const failed = (data.total[i] ?? 0) - passed
    let residual = passed * (point.slope / point.pass) - failed * (point.slope / point.fail)
    if (leverages !== null) residual += 0.5 * (leverages[i] ?? 0) * point.logWeightSlope
    for (let j = 0; j < size; j++) score[j] = (score[j] ?? 0) + residual * (row[j] ?? 0)
  }
  return score
}

const identity = (size: number): number[][] =>
  Array.from({ length: size }, (_, j) => Array.from({ length: size }, (__, k) => (j === k ? 1 : 0)))

const dot = (a: readonly number[], b: readonly number[]): number => a.reduce((sum, value, j) => sum + value * (b[j] ?? 0), 0)

/** Score and Fisher step on the plane. */
function stepOf(state: State, score: readonly number[], basis: readonly (readonly number[])[]): { step: number[]; decrement: number } | null {
  const slope = basis.map(direction => dot(direction, score))
  const turned = basis.map(direction => state.information.map(row => dot(row, direction)))
  const block = factorCholesky(basis.map(direction => turned.map(other => dot(direction, other))))
  if (block === null) return null
  const step = block.solve(slope)
  return { step, decrement: dot(slope, step) }
}

/** The objective at given coefficients, without fitting: for scans that look for a second maximum. */
export function binomialObjective(data: BinomialData, options: Pick<BinomialGlmOptions, 'link' | 'method'>, coefficients: readonly number[]): number {
  return evaluate(data, options, coefficients)?.objective ?? -Infinity
}

/**
 * Fits a binomial generalised linear model by Fisher scoring with step halving.
 *
 * Leaves out nothing and repairs nothing: separated data under `ml` run away and are refused (see `findSeparation`
 * to name it beforehand); `firth` always has a finite answer where the design has full rank.
 *
 * Sources: McCullagh & Nelder, Generalized Linear Models (1989); Firth, Biometrika 80 (1993) 27;
 * Heinze & Schemper, Stat. Med. 21 (2002) 2409.
 *
 * @example
 * fitBinomialGlm({ design: [[1]], passed: [0], total: [10] }, { link: 'logit', method: 'firth' }) // intercept ln(0.5 / 10.5)
 */
export function fitBinomialGlm(data: BinomialData, options: BinomialGlmOptions): BinomialGlmOutcome {
  const size = data.design[0]?.length ?? 0
  const { base, basis } = options.within ?? { base: new Array<number>(size).fill(0), basis: identity(size) }
  const coefficientsOf = (free: readonly number[]) =>
    base.map((value, j) => free.reduce((sum, amount, k) => sum + amount * (basis[k]?.[j] ?? 0), value))
  const answer = (state: State, free: readonly number[], iterations: number): BinomialGlmFit => ({
    kind: 'fitted',
    coefficients: coefficientsOf(free),
    free,
    covariance: state.factor.inverse(),
    logLikelihood: state.logLikelihood,
    objective: state.objective,
    fitted: state.points.map(point => point.pass),
    leverages: leveragesOf(data, state),
    iterations,
  })
  let free = basis.map((_, k) => options.start?.[k] ?? 0)
  let state = evaluate(data, options, coefficientsOf(free))
  if (state === null) return { kind: 'refused', reason: 'singular', detail: 'The exposures and sizes do not tell the coefficients apart.' }

  for (let iteration = 1; iteration <= iterationsMax; iteration++) {
    const ahead: { step: number[]; decrement: number } | null = stepOf(state, scoreOf(data, options, state), basis)
    if (ahead === null) return { kind: 'refused', reason: 'singular', detail: 'The information matrix is singular.' }
    // Separated data: the likelihood hardly rises any more, yet the coefficients run on by a whole step each time.
    const atRest = ahead.step.every((amount, k) => Math.abs(amount) < 1e-4 * (1 + Math.abs(free[k] ?? 0)))
    if (ahead.decrement < convergedBelow && atRest) {
      return answer(state, free, iteration)
    }
    const from = free
    const here = state.objective
    let next: State | null = null
    for (let share = 1; share > 1e-12 && next === null; share /= 2) {
      const candidate = from.map((value, k) => value + share * (ahead.step[k] ?? 0))
      const reached = evaluate(data, options, coefficientsOf(candidate))
      // At the optimum the objective only moves in its last digits: equal to rounding is good enough to go on.
      if (reached !== null && reached.objective >= here - 1e-14 * (1 + Math.abs(here))) {
        next = reached
        free = candidate
      }
    }
    if (next === null && ahead.decrement < flatBelow && atRest) return answer(state, free, iteration)
    if (next === null) return { kind: 'refused', reason: 'not-converged', detail: 'No step raises the likelihood any more, yet its slope is not zero.' }
    state = next
  }
  return { kind: 'refused', reason: 'not-converged', detail: `Not converged after ${iterationsMax} steps: the data may be separated.` }
}
