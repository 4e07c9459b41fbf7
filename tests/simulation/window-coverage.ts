import { randomNormal, type RandomSource } from '#shared/stats/index.ts'
import { edgePosterior } from '#shared/window/index.ts'

export interface EdgeCell {
  /** Prints, 0.1 s apart, ten features each. */
  readonly prints: number
  /** Logits by which 0.1 s at 1.7 s moves the response. */
  readonly steepness: number
  /** Print-to-print standard deviation on the logit. */
  readonly spread: number
}

export const edgeShares = [0.5, 0.9, 0.95] as const

export interface EdgeCoverage {
  /** Share of data sets whose 95 % interval holds the truth, for each of `edgeShares`. */
  readonly covered: readonly number[]
  /** Median width in seconds. */
  readonly width: readonly number[]
}

/** Coverage and width of an edge's intervals over simulated ladders of prints around 1.7 s. */
export function edgeCoverage(cell: EdgeCell, options: { readonly sets: number; readonly random: RandomSource }): EdgeCoverage {
  const { sets, random } = options
  const slope = cell.steepness / Math.log(1.8 / 1.7)
  const covered = edgeShares.map(() => 0)
  const widths = edgeShares.map((): number[] => [])
  for (let set = 0; set < sets; set++) {
    const edge = 1.7 + 0.2 * (random() - 0.5)
    const tallies = Array.from({ length: cell.prints }, (_, i) => {
      const exposure = 1.7 + 0.1 * (i - (cell.prints - 1) / 2)
      const eta = slope * Math.log(exposure / edge) + cell.spread * randomNormal(random)
      let passed = 0
      for (let feature = 0; feature < 10; feature++) if (random() < 1 / (1 + Math.exp(-eta))) passed++
      return { exposure, passed, total: 10 }
    })
    const posterior = edgePosterior({ tallies, kind: 'must-form', prior: { guess: 1.7 }, widthCount: 25 })
    for (const [k, share] of edgeShares.entries()) {
      const truth = edge * Math.exp(Math.log(share / (1 - share)) / slope)
      const [lower = 0, upper = 0] = posterior.quantiles(share, [0.025, 0.975])
      if (truth >= lower && truth <= upper) covered[k] = (covered[k] ?? 0) + 1
      widths[k]?.push(upper - lower)
    }
  }
  const median = (values: number[]) => values.sort((a, b) => a - b)[Math.floor(values.length / 2)] ?? 0
  return { covered: covered.map(count => count / sets), width: widths.map(median) }
}
