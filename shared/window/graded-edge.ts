import { randomNormal, type RandomSource } from '../stats/random.ts'
import { StatsError } from '../stats/types.ts'
import { checkTallies } from './check-tallies.ts'
import { countLogLikelihood, interpolateEta, printSpreads, quadrature } from './count-likelihood.ts'
import { defaultEdgePrior, type EdgePrior } from './edge-prior.ts'
import { DrawnEdge } from './drawn-edge.ts'
import { findMode } from './find-mode.ts'
import type { FeatureKind, Tally } from './types.ts'

/** What is believed of how an edge moves with size: d(ln exposure) / d(ln size), before a print is read. */
const sizeSlopeMean = { 'must-form': -1, 'must-stay-open': 1 } as const
const sizeSlopeSd = 0.5

const dimension = 3
const drawsPerSpread = 600
/** Student's t proposals with few degrees of freedom reach further than the posterior: no region is missed. */
const proposalDegrees = 5
const twoLogNine = 2 * Math.log(9)

interface TierCount {
  readonly logSize: number
  /** Log likelihood over eta, without print spread: the spread is shared by all tiers of a print. */
  readonly table: Float64Array
}

interface GradedPrint {
  readonly x: number
  readonly tiers: readonly TierCount[]
}

/** Tiers of one print share what the print adds of its own; a tally without a print is a print of its own. */
function groupByPrint(tallies: readonly Tally[], sign: number, logReference: number, misreadShare: number): GradedPrint[] {
  const prints = new Map<string, { x: number; tiers: TierCount[] }>()
  for (const [i, tally] of tallies.entries()) {
    const key = tally.printId === undefined ? `tally ${i}` : `print ${tally.printId} ${tally.exposure}`
    const print = prints.get(key) ?? { x: sign * Math.log(tally.exposure), tiers: [] }
    print.tiers.push({
      logSize: Math.log(tally.sizeMicrometres ?? 1) - logReference,
      table: countLogLikelihood({ passed: tally.passed, total: tally.total, spread: 0, misreadShare }),
    })
    prints.set(key, print)
  }
  return [...prints.values()]
}

function logLikelihood(prints: readonly GradedPrint[], spread: number, edge: number, sizeSlope: number, slope: number): number {
  let sum = 0
  for (const print of prints) {
    let largest = -Infinity
    const terms: number[] = []
    for (const { z, weight } of spread === 0 ? quadrature.slice(0, 1) : quadrature) {
      let term = spread === 0 ? 0 : Math.log(weight)
      for (const tier of print.tiers) term += interpolateEta(tier.table, slope * (print.x - edge - sizeSlope * tier.logSize) + spread * z)
      terms.push(term)
      largest = Math.max(largest, term)
    }
    let total = 0
    for (const term of terms) total += Math.exp(term - largest)
    sum += largest + Math.log(total)
  }
  return sum
}

/** Posterior of an edge that moves with feature size. */
export interface GradedEdge {
  readonly kind: FeatureKind
  /** The belief about the edge at one size. */
  atSize(sizeMicrometres: number): DrawnEdge
  /** Draws of ln exposure at the reference size, of the size slope, and of the slope on ln exposure. */
  readonly draws: { readonly edges: Float64Array; readonly sizeSlopes: Float64Array; readonly slopes: Float64Array }
  readonly referenceSizeMicrometres: number
  /** Share of the proposals that count; low values mean that the answer is less exact than it looks. */
  readonly effectiveShare: number
}

/**
 * The posterior of an edge from graded tiers: edge(size) = m + g · ln(size / reference).
 *
 * One model over edge, size slope, width and print-to-print spread. For each spread the mode is found and importance
 * draws are made around it (Laplace approximation as proposal; Geweke, Econometrica 57 (1989) 1317).
 *
 * @param options.tallies - each with its size; tallies of one print carry one printId
 * @param options.random - for the draws; seed it from the data to keep answers from flickering
 * @throws {StatsError} `size-needed`, `bad-tally`
 * @example
 * gradedEdge({ tallies, kind: 'must-form', prior: { guess: 1.7 }, random: seededRandom(1) }).atSize(100).quantiles(0.95, [0.5])
 */
export function gradedEdge(options: {
  readonly tallies: readonly Tally[]
  readonly kind: FeatureKind
  readonly prior: Pick<EdgePrior, 'guess'> & Partial<EdgePrior>
  readonly random: RandomSource
}): GradedEdge {
  const prior: EdgePrior = { ...defaultEdgePrior, ...options.prior }
  const { kind, random } = options
  const tallies = checkTallies(options.tallies)
  if (tallies.some(tally => tally.sizeMicrometres === undefined)) throw new StatsError('size-needed', 'graded tallies need their sizes')
  const sign = kind === 'must-form' ? 1 : -1
  const logReference = tallies.length === 0 ? 0 : tallies.reduce((sum, tally) => sum + Math.log(tally.sizeMicrometres ?? 1), 0) / tallies.length
  const prints = groupByPrint(tallies, sign, logReference, prior.misreadShare)
  const centre = sign * Math.log(prior.guess)
  const slopeMean = sign * sizeSlopeMean[kind]

  const logTarget = (spread: number) => ([edge = 0, sizeSlope = 0, logWidth = 0]: readonly number[]): number => {
    // The sign of the size slope is kept: larger must-form features never need more exposure.
    if (sizeSlope * slopeMean <= 0) return -Infinity
    return (
      logLikelihood(prints, spread, edge, sizeSlope, twoLogNine / Math.exp(logWidth)) -
      0.5 * ((edge - centre) / prior.guessLogSd) ** 2 -
      0.5 * ((sizeSlope - slopeMean) / sizeSlopeSd) ** 2 -
      0.5 * ((logWidth - Math.log(prior.widthMedian)) / prior.widthLogSd) ** 2 -
      0.5 * (spread / prior.printSpreadScale) ** 2
    )
  }

  const points: { at: readonly number[]; logWeight: number }[] = []
  let start: readonly number[] = [centre, slopeMean, Math.log(prior.widthMedian)]
  for (const spread of printSpreads) {
    const target = logTarget(spread)
    const mode = findMode(target, start, [prior.guessLogSd, sizeSlopeSd, prior.widthLogSd])
    start = mode.at
    for (let i = 0; i < drawsPerSpread; i++) {
      const noise = Array.from({ length: dimension }, () => randomNormal(random))
      let chi = 0
      for (let d = 0; d < proposalDegrees; d++) chi += randomNormal(random) ** 2
      const stretch = Math.sqrt(proposalDegrees / chi)
      const step = noise.map(value => value * stretch)
      const at = mode.at.map((value, a) => step.reduce((sum, noiseValue, b) => sum + (mode.factor[a]?.[b] ?? 0) * noiseValue, value))
      const square = step.reduce((sum, value) => sum + value * value, 0)
      const logProposal = -0.5 * (proposalDegrees + dimension) * Math.log1p(square / proposalDegrees) - mode.logDeterminant
      points.push({ at, logWeight: target(at) - logProposal })
    }
  }
  return drawEvenly(points, { kind, sign, logReference, random, tallies })
}

function drawEvenly(
  points: readonly { at: readonly number[]; logWeight: number }[],
  facts: { kind: FeatureKind; sign: number; logReference: number; random: RandomSource; tallies: readonly Tally[] },
): GradedEdge {
  const { kind, sign, logReference, tallies } = facts
  const largest = points.reduce((a, point) => Math.max(a, point.logWeight), -Infinity)
  const weights = points.map(point => Math.exp(point.logWeight - largest))
  const total = weights.reduce((a, b) => a + b, 0)
  const squares = weights.reduce((sum, weight) => sum + weight * weight, 0)
  const count = 2000
  const edges = new Float64Array(count)
  const sizeSlopes = new Float64Array(count)
  const slopes = new Float64Array(count)
  const offset = facts.random()
  let below = 0
  let drawn = 0
  for (const [i, point] of points.entries()) {
    below += (weights[i] ?? 0) / total
    while (drawn < count && (drawn + offset) / count <= below) {
      edges[drawn] = sign * (point.at[0] ?? 0)
      sizeSlopes[drawn] = sign * (point.at[1] ?? 0)
      slopes[drawn] = twoLogNine / Math.exp(point.at[2] ?? 0)
      drawn++
    }
  }
  const draws = { edges: edges.subarray(0, drawn), sizeSlopes: sizeSlopes.subarray(0, drawn), slopes: slopes.subarray(0, drawn) }
  return {
    kind,
    draws,
    referenceSizeMicrometres: Math.exp(logReference),
    effectiveShare: (total * total) / squares / points.length,
    atSize(sizeMicrometres) {
      const logSize = Math.log(sizeMicrometres) - logReference
      return new DrawnEdge({
        kind,
        edges: draws.edges.map((edge, i) => edge + (draws.sizeSlopes[i] ?? 0) * logSize),
        slopes: draws.slopes,
        // The nearest tier that was printed decides whether this size was tested on both sides.
        tallies: nearestTier(tallies, sizeMicrometres),
      })
    },
  }
}

function nearestTier(tallies: readonly Tally[], sizeMicrometres: number): readonly Tally[] {
  const distance = (tally: Tally) => Math.abs(Math.log((tally.sizeMicrometres ?? 1) / sizeMicrometres))
  const nearest = tallies.reduce((least, tally) => Math.min(least, distance(tally)), Infinity)
  return tallies.filter(tally => distance(tally) <= nearest + 1e-9)
}
