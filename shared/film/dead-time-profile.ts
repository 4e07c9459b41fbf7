import { fieller } from '../stats/fieller.ts'
import { fitStraightLine, type StraightLine } from '../stats/straight-line.ts'
import type { Interval } from '../stats/types.ts'
import type { ModelPoint } from './film-model-types.ts'

/**
 * Confidence sets of the dead-time curve by its profile: with t0 held the curve is a straight line in ln(t − t0).
 *
 * All (t0, line) whose sum of squares lies within t² s² of the smallest make up the set; what it says about a quantity
 * is the union over t0. Better than symmetric intervals, because t0 and the rest are strongly tied (Bates & Watts,
 * Nonlinear Regression Analysis and Its Applications, 1988, ch. 6).
 */
export interface DeadTimeProfile {
  readonly deadTime: Interval
  readonly penetrationDepth: Interval
  readonly criticalExposure: Interval
  /** Exposures whose mean film may have a depth. */
  exposureForDepth(depthMicrometres: number): Interval
  /** Mean depths at an exposure. */
  depthAt(exposure: number): Interval
}

/** Points of the grid over t0; between neighbours the ends move by less than a hundredth of the interval. */
const gridSize = 160

/** The straight line in ln(t − t0), or null where t0 leaves no spread. */
export function lineAtDeadTime(points: readonly ModelPoint[], deadTime: number): StraightLine | null {
  const x = points.map(point => Math.log(point.exposure - deadTime))
  if (x.some(value => !Number.isFinite(value))) return null
  try {
    return fitStraightLine({ x, y: points.map(point => point.depthMicrometres), weights: points.map(point => point.weight) })
  } catch {
    return null
  }
}

/**
 * @param points - films, or one point for each exposure: only differences of sums of squares count
 * @param best.allowance - t² s², by how much the sum of squares may rise
 */
export function profileDeadTime(
  points: readonly ModelPoint[],
  best: { readonly deadTime: number; readonly allowance: number },
): DeadTimeProfile {
  const shortest = points.reduce((least, point) => Math.min(least, point.exposure), Infinity)
  const longest = points.reduce((most, point) => Math.max(most, point.exposure), 0)
  /** On this scale t0 cannot pass the shortest exposure. */
  const at = (u: number): StraightLine | null => lineAtDeadTime(points, shortest - Math.exp(u))
  const bound = (lineAtDeadTime(points, best.deadTime)?.residualSumOfSquares ?? 0) + best.allowance
  const left = (u: number): number => bound - (at(u)?.residualSumOfSquares ?? Infinity)
  const centre = Math.log(shortest - best.deadTime)
  const nearest = Math.log(shortest) - 25
  const furthest = Math.log(longest) + 5
  const near = edge(left, centre, nearest)
  const far = edge(left, centre, furthest)
  // The lower end of t0 is open: ever longer dead times below zero turn the curve into a line in t.
  const open = far === null
  const from = near ?? nearest
  const grid = open ? [] : Array.from({ length: gridSize + 1 }, (_, i) => from + ((far - from) * i) / gridSize)

  const union = (part: (line: StraightLine, room: number, deadTime: number) => Interval): Interval => {
    if (open) return { kind: 'unbounded' }
    let lower = Infinity
    let upper = -Infinity
    for (const u of grid) {
      const line = at(u)
      const room = left(u)
      if (line === null || room < 0) continue
      const interval = part(line, room, shortest - Math.exp(u))
      if (interval.kind !== 'finite') return { kind: 'unbounded' }
      lower = Math.min(lower, interval.lower)
      upper = Math.max(upper, interval.upper)
    }
    return lower <= upper && Number.isFinite(lower) && Number.isFinite(upper) ? { kind: 'finite', lower, upper } : { kind: 'unbounded' }
  }
  /** Of ln(t − t0) at a depth, with the room that t0 leaves: Fieller with that room in place of t² s². */
  const logAt = (line: StraightLine, room: number, depth: number): Interval =>
    fieller({
      numerator: depth - line.meanY,
      denominator: line.slope,
      numeratorVariance: 1 / line.sumWeights,
      denominatorVariance: 1 / line.sumSquaresX,
      covariance: 0,
      quantile: Math.sqrt(room),
    })
  const shifted = (interval: Interval, line: StraightLine, deadTime: number): Interval =>
    interval.kind === 'finite'
      ? { kind: 'finite', lower: deadTime + Math.exp(line.meanX + interval.lower), upper: deadTime + Math.exp(line.meanX + interval.upper) }
      : { kind: 'unbounded' }
  return {
    deadTime: open ? { kind: 'unbounded' } : { kind: 'finite', lower: shortest - Math.exp(far), upper: shortest - Math.exp(from) },
    penetrationDepth: union((line, room) => {
      const half = Math.sqrt(room / line.sumSquaresX)
      return { kind: 'finite', lower: line.slope - half, upper: line.slope + half }
    }),
    criticalExposure: union((line, room) => shifted(logAt(line, room, 0), line, 0)),
    exposureForDepth: depth => union((line, room, deadTime) => shifted(logAt(line, room, depth), line, deadTime)),
    depthAt: exposure => union((line, room, deadTime) => {
      const distance = Math.log(exposure - deadTime) - line.meanX
      if (!Number.isFinite(distance)) return { kind: 'unbounded' }
      const half = Math.sqrt(room * (1 / line.sumWeights + distance ** 2 / line.sumSquaresX))
      const middle = line.meanY + line.slope * distance
      return { kind: 'finite', lower: middle - half, upper: middle + half }
    }),
  }
}

/** Where `left` turns negative on the way from inside to the limit, or null when it does not. */
function edge(left: (u: number) => number, inside: number, limit: number): number | null {
  const steps = 100
  let known = inside
  for (let i = 1; i <= steps; i++) {
    const next = inside + ((limit - inside) * i) / steps
    if (left(next) >= 0) {
      known = next
      continue
    }
    let outside = next
    for (let k = 0; k < 60; k++) {
      const middle = (known + outside) / 2
      if (left(middle) >= 0) known = middle
      else outside = middle
    }
    return known
  }
  return null
}
