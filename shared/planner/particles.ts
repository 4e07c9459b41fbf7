import type { RandomSource } from '../stats/random.ts'
import { randomNormal } from '../stats/random.ts'
import normalQuantile from '@stdlib/stats-base-dists-normal-quantile'
import { coordinateCount, curvesOf, preparePrint, printLogLikelihood, type PreparedPrint, type WindowCurves } from './window-model.ts'
import type { PlannerPrior, ReadPrint } from './types.ts'

/** Equal-weight particles: what is believed of centre, window, slopes and coarse shift after the prints so far. */
export interface WindowBelief {
  readonly prior: PlannerPrior
  readonly prints: readonly ReadPrint[]
  /** Standard-normal coordinates, particle i from i * 5. */
  readonly coordinates: Float64Array
  readonly curves: readonly WindowCurves[]
}

const sweeps = 3
const scales = [0.9, 0.5, 0.9]
/** Share of particles that must still count before they are renewed. */
const effectiveShareMin = 0.4

/**
 * The belief before any print: normal draws, the first coordinate stratified so that the guess is covered evenly.
 *
 * @param options.count - particles (@default 2000)
 */
export function startBelief(options: { readonly prior: PlannerPrior; readonly random: RandomSource; readonly count?: number }): WindowBelief {
  const { prior, random, count = 2000 } = options
  const coordinates = new Float64Array(count * coordinateCount)
  for (let i = 0; i < count; i++) {
    coordinates[i * coordinateCount] = normalQuantile((i + random()) / count, 0, 1)
    for (let d = 1; d < coordinateCount; d++) coordinates[i * coordinateCount + d] = randomNormal(random)
  }
  return { prior, prints: [], coordinates, curves: allCurves(prior, coordinates) }
}

function allCurves(prior: PlannerPrior, coordinates: Float64Array): WindowCurves[] {
  return Array.from({ length: coordinates.length / coordinateCount }, (_, i) => curvesOf(prior, coordinates, i * coordinateCount))
}

function effectiveShare(logWeights: Float64Array, power: number): number {
  let largest = -Infinity
  for (const value of logWeights) largest = Math.max(largest, value)
  let sum = 0
  let squares = 0
  for (const value of logWeights) {
    const weight = Math.exp(power * (value - largest))
    sum += weight
    squares += weight * weight
  }
  return (sum * sum) / squares / logWeights.length
}

/** Largest rise of the power that leaves enough effective particles. */
function nextPower(logWeights: Float64Array, remaining: number): number {
  if (effectiveShare(logWeights, remaining) >= effectiveShareMin) return remaining
  let low = 0
  let high = remaining
  for (let i = 0; i < 30; i++) {
    const middle = (low + high) / 2
    if (effectiveShare(logWeights, middle) >= effectiveShareMin) low = middle
    else high = middle
  }
  return Math.max(low, 1e-6)
}

function resample(coordinates: Float64Array, logWeights: Float64Array, power: number, random: RandomSource): Float64Array {
  const count = logWeights.length
  let largest = -Infinity
  for (const value of logWeights) largest = Math.max(largest, value)
  let total = 0
  for (const value of logWeights) total += Math.exp(power * (value - largest))
  const chosen = new Float64Array(coordinates.length)
  const offset = random()
  let below = 0
  let next = 0
  for (let i = 0; i < count; i++) {
    below += Math.exp(power * ((logWeights[i] ?? 0) - largest)) / total
    while (next < count && (next + offset) / count <= below) {
      chosen.set(coordinates.subarray(i * coordinateCount, (i + 1) * coordinateCount), next * coordinateCount)
      next++
    }
  }
  for (; next < count; next++) chosen.set(coordinates.subarray((count - 1) * coordinateCount), next * coordinateCount)
  return chosen
}

/** Lower triangle of the Cholesky factor of the cloud's covariance, with a floor that keeps it moving. */
function cloudFactor(coordinates: Float64Array): number[][] {
  const count = coordinates.length / coordinateCount
  const mean = new Array<number>(coordinateCount).fill(0)
  for (let i = 0; i < coordinates.length; i++) mean[i % coordinateCount] = (mean[i % coordinateCount] ?? 0) + (coordinates[i] ?? 0) / count
  const covariance = Array.from({ length: coordinateCount }, () => new Array<number>(coordinateCount).fill(0))
  for (let i = 0; i < count; i++) {
    for (let a = 0; a < coordinateCount; a++) {
      const da = (coordinates[i * coordinateCount + a] ?? 0) - (mean[a] ?? 0)
      const row = covariance[a] ?? []
      for (let b = 0; b <= a; b++) row[b] = (row[b] ?? 0) + (da * ((coordinates[i * coordinateCount + b] ?? 0) - (mean[b] ?? 0))) / count
    }
  }
  const lower: number[][] = []
  for (let a = 0; a < coordinateCount; a++) {
    const row: number[] = []
    for (let b = 0; b <= a; b++) {
      let sum = (covariance[a]?.[b] ?? 0) + (a === b ? 1e-6 : 0)
      for (let k = 0; k < b; k++) sum -= (row[k] ?? 0) * (a === b ? (row[k] ?? 0) : (lower[b]?.[k] ?? 0))
      row.push(a === b ? Math.sqrt(Math.max(sum, 1e-9)) : sum / (lower[b]?.[b] ?? 1))
    }
    lower.push(row)
  }
  return lower
}

/** Metropolis moves on the full posterior of the former prints and the new one at its present power. */
function moveAll(
  prior: PlannerPrior,
  coordinates: Float64Array,
  former: readonly PreparedPrint[],
  latest: PreparedPrint,
  power: number,
  random: RandomSource,
): Float64Array {
  const count = coordinates.length / coordinateCount
  const latestLog = new Float64Array(count)
  const target = new Float64Array(count)
  const evaluate = (z: Float64Array, at: number): { log: number; latest: number } => {
    const curves = curvesOf(prior, z, at)
    let log = 0
    for (let d = 0; d < coordinateCount; d++) log -= 0.5 * (z[at + d] ?? 0) ** 2
    for (const print of former) log += printLogLikelihood(print, curves)
    const last = printLogLikelihood(latest, curves)
    return { log: log + power * last, latest: last }
  }
  for (let i = 0; i < count; i++) {
    const value = evaluate(coordinates, i * coordinateCount)
    target[i] = value.log
    latestLog[i] = value.latest
  }
  const proposal = new Float64Array(coordinateCount)
  const noise = new Array<number>(coordinateCount).fill(0)
  for (let sweep = 0; sweep < sweeps; sweep++) {
    const factor = cloudFactor(coordinates)
    const scale = scales[sweep % scales.length] ?? 1
    for (let i = 0; i < count; i++) {
      for (let d = 0; d < coordinateCount; d++) noise[d] = scale * randomNormal(random)
      for (let d = 0; d < coordinateCount; d++) {
        let step = 0
        for (let k = 0; k <= d; k++) step += (factor[d]?.[k] ?? 0) * (noise[k] ?? 0)
        proposal[d] = (coordinates[i * coordinateCount + d] ?? 0) + step
      }
      const value = evaluate(proposal, 0)
      if (Math.log(random()) < value.log - (target[i] ?? 0)) {
        coordinates.set(proposal, i * coordinateCount)
        target[i] = value.log
        latestLog[i] = value.latest
      }
    }
  }
  return latestLog
}

/**
 * The belief after one more print: the new likelihood is let in by degrees, particles are renewed and moved whenever
 * too few of them still count (tempered sequential Monte Carlo: Del Moral, Doucet & Jasra, JRSS B 68 (2006) 411).
 */
export function updateBelief(belief: WindowBelief, print: ReadPrint, random: RandomSource): WindowBelief {
  const { prior } = belief
  const former = belief.prints.map(preparePrint)
  const latest = preparePrint(print)
  let coordinates = belief.coordinates
  let logWeights = Float64Array.from(belief.curves, curves => printLogLikelihood(latest, curves))
  for (let power = 0; power < 1; ) {
    const rise = nextPower(logWeights, 1 - power)
    coordinates = resample(coordinates, logWeights, rise, random)
    power = Math.min(1, power + rise)
    logWeights = Float64Array.from(moveAll(prior, coordinates, former, latest, power, random))
  }
  return { prior, prints: [...belief.prints, print], coordinates, curves: allCurves(prior, coordinates) }
}

/** The belief after a series of prints. */
export function beliefAfter(options: {
  readonly prior: PlannerPrior
  readonly prints: readonly ReadPrint[]
  readonly random: RandomSource
  readonly count?: number
}): WindowBelief {
  return options.prints.reduce((belief, print) => updateBelief(belief, print, options.random), startBelief(options))
}
