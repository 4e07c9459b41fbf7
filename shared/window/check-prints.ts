import { countLogLikelihood, interpolateEta, printSpreads } from './count-likelihood.ts'
import { edgePosterior } from './edge-posterior.ts'
import type { EdgePrior } from './edge-prior.ts'
import type { FeatureKind, Tally } from './types.ts'

export interface PrintCheck {
  /** Leave-one-out predictive chance of a count as unlikely as the one read; index as in the tallies. */
  readonly chances: readonly number[]
  /**
   * none: no print disagrees. unnamed: one of at most four prints disagrees, and which one cannot be told.
   * named: the print at `index` disagrees with the others.
   */
  readonly verdict:
    | { readonly kind: 'none' }
    | { readonly kind: 'unnamed'; readonly sentence: string }
    | { readonly kind: 'named'; readonly index: number; readonly sentence: string }
}

/** Below this a print is flagged; clean ladders are flagged in about 1 % of cases (simulation). */
const chanceMin = 0.01
/** With so few prints the odd one cannot be told from the others. */
const printsToName = 5

/**
 * Looks for an odd print: one whose count the other prints would hardly have foretold.
 *
 * Each print is left out in turn, the edge is fitted from the rest, and the chance of a count at most as likely as the
 * one read is added up. Nothing is ever dropped by itself.
 *
 * @example
 * checkPrints({ tallies, kind: 'must-form', prior: { guess: 1.7 } }).verdict.kind // 'none'
 */
export function checkPrints(options: {
  readonly tallies: readonly Tally[]
  readonly kind: FeatureKind
  readonly prior: Pick<EdgePrior, 'guess'> & Partial<EdgePrior>
}): PrintCheck {
  const { tallies, kind } = options
  if (tallies.length < 3) return { chances: tallies.map(() => 1), verdict: { kind: 'none' } }
  const chances = tallies.map((tally, i) =>
    predictiveChance(tally, { ...options, tallies: tallies.filter((_, k) => k !== i), widthCount: 25, logStep: 0.01 }))
  const lowest = Math.min(...chances)
  if (lowest >= chanceMin) return { chances, verdict: { kind: 'none' } }
  if (tallies.length < printsToName) {
    return { chances, verdict: { kind: 'unnamed', sentence: `One of these ${tallies.length} prints disagrees with the others; with so few, it cannot be said which.` } }
  }
  const index = chances.indexOf(lowest)
  const odd = tallies[index]
  const what = kind === 'must-form' ? 'formed' : 'stayed open'
  return {
    chances,
    verdict: {
      kind: 'named',
      index,
      sentence: `The print at ${odd?.exposure ?? 0} disagrees with the others: ${odd?.passed ?? 0} of ${odd?.total ?? 0} ${what}, which the other prints would show in fewer than 1 of 100 cases.`,
    },
  }
}

function predictiveChance(tally: Tally, rest: Parameters<typeof edgePosterior>[0]): number {
  const posterior = edgePosterior(rest)
  const { edges, slopes } = posterior.draws(400)
  const { printSpreadScale, misreadShare } = posterior.grid.prior
  const sign = rest.kind === 'must-form' ? 1 : -1
  const x = Math.log(tally.exposure)
  // The spread of a print that is not yet seen comes from the prior: a few prints say next to nothing about it.
  const weights = printSpreads.map(spread => Math.exp(-0.5 * (spread / printSpreadScale) ** 2))
  const weightSum = weights.reduce((sum, weight) => sum + weight, 0)
  const chances = Array.from({ length: tally.total + 1 }, (_, passed) => {
    let chance = 0
    for (const [s, spread] of printSpreads.entries()) {
      const table = countLogLikelihood({ passed, total: tally.total, spread, misreadShare })
      for (let i = 0; i < edges.length; i++) {
        const eta = sign * (slopes[i] ?? 0) * (x - (edges[i] ?? 0))
        chance += ((weights[s] ?? 0) / weightSum / edges.length) * Math.exp(interpolateEta(table, eta))
      }
    }
    return chance
  })
  const own = chances[tally.passed] ?? 0
  return chances.reduce((sum, chance) => (chance <= own * (1 + 1e-9) ? sum + chance : sum), 0)
}
