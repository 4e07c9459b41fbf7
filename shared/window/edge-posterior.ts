import { StatsError } from '../stats/types.ts'
import { checkTallies } from './check-tallies.ts'
import { countLogLikelihood, etaCount, etaLimit, etaStep, printSpreads } from './count-likelihood.ts'
import { defaultEdgePrior, type EdgePrior } from './edge-prior.ts'
import { EdgePosterior } from './edge-distribution.ts'
import type { FeatureKind, Tally } from './types.ts'

/** Width of a logistic curve from 10 to 90 % is 2 ln 9 over its slope. */
const twoLogNine = 2 * Math.log(9)

const widthMin = 0.015
const widthMax = 1

/**
 * The posterior of one edge: where half of the features pass, and how sharply, given every print so far.
 *
 * A grid over the edge m (ln exposure), the width w = ln(E90/E10) and the print-to-print spread; the default for every
 * number a person acts on, because ladders are short, often separated, and prints differ from print to print. Each
 * tally counts as a print of its own: counts of two prints at one exposure are never pooled.
 *
 * Coverage and widths of its intervals are measured by simulation (`npm run simulate`).
 *
 * @param options.tallies - of one kind and one size (or a set read as one count)
 * @param options.prior - `guess` is needed; the rest defaults to `defaultEdgePrior`
 * @param options.widthCount - points of the width grid (@default 31)
 * @param options.logStep - step of the edge grid in ln exposure (@default 0.005)
 * @throws {StatsError} `bad-tally`, `bad-prior`
 * @example
 * const edge = edgePosterior({ tallies: [{ exposure: 1.6, passed: 2, total: 10 }, { exposure: 1.8, passed: 9, total: 10 }], kind: 'must-form', prior: { guess: 1.7 } })
 * edge.quantiles(0.5, [0.025, 0.5, 0.975]) // seconds
 */
export function edgePosterior(options: {
  readonly tallies: readonly Tally[]
  readonly kind: FeatureKind
  readonly prior: Pick<EdgePrior, 'guess'> & Partial<EdgePrior>
  readonly widthCount?: number
  readonly logStep?: number
}): EdgePosterior {
  const prior: EdgePrior = { ...defaultEdgePrior, ...options.prior }
  if (!(prior.guess > 0) || !(prior.guessLogSd > 0) || !(prior.misreadShare > 0 && prior.misreadShare < 1)) {
    throw new StatsError('bad-prior', 'guess and its spread must be above zero, the misread share inside (0, 1)')
  }
  const { widthCount = 31, logStep = 0.005 } = options
  const tallies = checkTallies(options.tallies)
  // must-stay-open is must-form on a mirrored axis: one code for both.
  const sign = options.kind === 'must-form' ? 1 : -1

  const centre = sign * Math.log(prior.guess)
  const reach = Math.max(4 * prior.guessLogSd, 1.4)
  const edgeCount = 2 * Math.round(reach / logStep) + 1
  const edgeStart = centre - Math.round(reach / logStep) * logStep

  const logWidthStart = Math.log(widthMin)
  const logWidthStep = (Math.log(widthMax) - logWidthStart) / (widthCount - 1)
  const slopes = Float64Array.from({ length: widthCount }, (_, i) => twoLogNine / Math.exp(logWidthStart + i * logWidthStep))
  const x = tallies.map(tally => sign * Math.log(tally.exposure))

  const cells = edgeCount * widthCount
  const mass = new Float64Array(cells)
  const logPosterior = printSpreads.map(() => new Float64Array(cells))
  let largest = -Infinity
  for (const [s, spread] of printSpreads.entries()) {
    const target = logPosterior[s] ?? mass
    const logSpreadPrior = -0.5 * (spread / prior.printSpreadScale) ** 2
    for (let i = 0; i < widthCount; i++) {
      const logWidth = logWidthStart + i * logWidthStep
      const logWidthPrior = -0.5 * ((logWidth - Math.log(prior.widthMedian)) / prior.widthLogSd) ** 2
      for (let j = 0; j < edgeCount; j++) {
        const z = (edgeStart + j * logStep - centre) / prior.guessLogSd
        target[i * edgeCount + j] = logSpreadPrior + logWidthPrior - 0.5 * z * z
      }
    }
    for (const [k, tally] of tallies.entries()) {
      const table = countLogLikelihood({ passed: tally.passed, total: tally.total, spread, misreadShare: prior.misreadShare })
      for (let i = 0; i < widthCount; i++) {
        const slope = slopes[i] ?? 0
        // Position in the table falls by a constant from edge to edge: no division in the inner loop.
        let position = (slope * ((x[k] ?? 0) - edgeStart) + etaLimit) / etaStep
        const fall = (slope * logStep) / etaStep
        for (let j = 0, cell = i * edgeCount; j < edgeCount; j++, cell++, position -= fall) {
          let value: number
          if (position <= 0) value = table[0] ?? 0
          else if (position >= etaCount - 1) value = table[etaCount - 1] ?? 0
          else {
            const below = Math.floor(position)
            const low = table[below] ?? 0
            value = low + (position - below) * ((table[below + 1] ?? 0) - low)
          }
          target[cell] = (target[cell] ?? 0) + value
        }
      }
    }
    for (let cell = 0; cell < cells; cell++) largest = Math.max(largest, target[cell] ?? 0)
  }

  let total = 0
  const spreadMass = printSpreads.map(() => 0)
  for (const [s, target] of logPosterior.entries()) {
    let sum = 0
    for (let cell = 0; cell < cells; cell++) {
      // Below e^-40 of the peak a cell moves no digit that is shown.
      const lag = (target[cell] ?? 0) - largest
      if (lag < -40) continue
      const weight = Math.exp(lag)
      mass[cell] = (mass[cell] ?? 0) + weight
      sum += weight
    }
    spreadMass[s] = sum
    total += sum
  }
  for (let cell = 0; cell < cells; cell++) mass[cell] = (mass[cell] ?? 0) / total

  return new EdgePosterior({
    kind: options.kind,
    tallies,
    prior,
    edgeStart,
    logStep,
    edgeCount,
    slopes,
    mass,
    printSpread: printSpreads.map((spread, s) => ({ spread, probability: (spreadMass[s] ?? 0) / total })),
  })
}
