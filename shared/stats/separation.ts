import type { BinomialData } from './binomial-glm.ts'

/**
 * `overlap`: maximum likelihood exists. `quasi`: a plane splits passes from fails but for rows that lie on it.
 * `complete`: a plane splits them all. In the last two the likelihood rises for ever and has no maximum.
 */
export type Separation = 'overlap' | 'quasi' | 'complete'

/** One-sided demand on a splitting direction: passes on its upper side, fails on its lower one. */
function constraintsOf(data: BinomialData): number[][] {
  const seen = new Map<string, number[]>()
  const add = (row: readonly number[], sign: number) => {
    const constraint = row.map(value => sign * value)
    seen.set(constraint.join(), constraint)
  }
  for (const [i, row] of data.design.entries()) {
    const passed = data.passed[i] ?? 0
    const total = data.total[i] ?? 0
    if (passed > 0) add(row, 1)
    if (passed < total) add(row, -1)
  }
  return [...seen.values()]
}

function cross(a: readonly number[], b: readonly number[]): number[] {
  const [a0 = 0, a1 = 0, a2 = 0] = a
  const [b0 = 0, b1 = 0, b2 = 0] = b
  return [a1 * b2 - a2 * b1, a2 * b0 - a0 * b2, a0 * b1 - a1 * b0]
}

/** Every edge that the cone of splitting directions could have: it lies in as many constraint planes as it needs. */
function* edgesOf(constraints: readonly number[][], size: number): Generator<number[]> {
  if (size === 1) yield* [[1], [-1]]
  if (size === 2) {
    for (const [a = 0, b = 0] of constraints) yield* [[-b, a], [b, -a]]
  }
  if (size === 3) {
    for (const [i, a] of constraints.entries()) {
      for (const b of constraints.slice(i + 1)) {
        const direction = cross(a, b)
        yield direction
        yield direction.map(value => -value)
      }
    }
  }
}

/**
 * Tells whether pass/fail data are separated (Albert & Anderson, Biometrika 71 (1984) 1).
 *
 * Exact for one to three columns (intercept, log exposure, log size): the cone of splitting directions is searched
 * edge by edge. Rows that repeat count once.
 *
 * @throws {RangeError} for more than three columns
 * @example
 * findSeparation({ design: [[1, 1], [1, 2]], passed: [0, 5], total: [5, 5] }) // => 'complete'
 */
export function findSeparation(data: BinomialData): Separation {
  const size = data.design[0]?.length ?? 0
  if (size < 1 || size > 3) throw new RangeError(`findSeparation takes 1 to 3 columns, got ${size}`)
  const constraints = constraintsOf(data)
  const inside = new Array<number>(size).fill(0)
  let separated = false
  for (const edge of edgesOf(constraints, size)) {
    const length = Math.hypot(...edge)
    if (length === 0) continue
    let strictly = false
    const holds = constraints.every(constraint => {
      const product = constraint.reduce((sum, value, j) => sum + value * (edge[j] ?? 0), 0)
      const tolerance = 1e-12 * length * Math.hypot(...constraint)
      if (product > tolerance) strictly = true
      return product >= -tolerance
    })
    if (!holds || !strictly) continue
    separated = true
    edge.forEach((value, j) => { inside[j] = (inside[j] ?? 0) + value / length })
  }
  if (!separated) return 'overlap'
  const complete = constraints.every(constraint => {
    const product = constraint.reduce((sum, value, j) => sum + value * (inside[j] ?? 0), 0)
    return product > 1e-12 * Math.hypot(...inside) * Math.hypot(...constraint)
  })
  return complete ? 'complete' : 'quasi'
}
