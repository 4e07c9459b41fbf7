import type { RandomSource } from '#shared/stats/index.ts'
import { gradedCoverage } from './graded-coverage.ts'
import { runPlanner } from './planner-against-practice.ts'
import { edgeCoverage } from './window-coverage.ts'

interface ReportOptions {
  readonly sets: number
  readonly random: RandomSource
  readonly print: (text: string) => void
}

const percent = (share: number): string => (100 * share).toFixed(1)

/** Coverage and width of the edge's intervals: prints x steepness x print-to-print spread. */
export function reportWindow({ sets, random, print }: ReportOptions): void {
  print(`\nEdge of the window: 95 % intervals, coverage % (median width, s); Monte Carlo error ${percent(Math.sqrt((0.95 * 0.05) / sets))} points`)
  print('prints  L     spread  ED50             ED90             ED95')
  for (const prints of [3, 4, 5, 7]) {
    for (const steepness of [1, 2, 4]) {
      for (const spread of [0, 0.3, 0.5]) {
        const { covered, width } = edgeCoverage({ prints, steepness, spread }, { sets, random })
        print(`${String(prints).padEnd(8)}${String(steepness).padEnd(6)}${String(spread).padEnd(8)}${covered.map((share, k) => `${percent(share)} (${(width[k] ?? 0).toFixed(2)})`.padEnd(17)).join('')}`)
      }
    }
  }
}

/** Graded tiers: the edge at one size, and the finest detail that has a window. */
export function reportGraded({ sets, random, print }: ReportOptions): void {
  const rows = Math.min(sets, 500)
  print(`\nGraded tiers, five sizes of five features: 95 % intervals, coverage %; Monte Carlo error ${percent(Math.sqrt((0.95 * 0.05) / rows))} points`)
  print('prints  spread  edge at 100 µm  finest detail  proposals that count %')
  for (const prints of [3, 4, 6]) {
    for (const spread of [0, 0.3, 0.5]) {
      const r = gradedCoverage({ prints, spread, sets: rows, random })
      print(`${String(prints).padEnd(8)}${String(spread).padEnd(8)}${percent(r.edge).padEnd(16)}${percent(r.detailLimit).padEnd(15)}${percent(r.effectiveShare)}`)
    }
  }
}

/** The planner against common practice (coarse, then fine by hand until bracketed: 121 and 103 minutes). */
export function reportPlanner({ sets, random, print }: ReportOptions): void {
  const truths = Math.min(sets, 300)
  print(`\nNext print: planner on ${truths} truths a row; by hand 121 min and 94.7 % from a guess, 103 min and 97.0 % from a film curve`)
  print('centre SD  care      minutes  prints  within 1 step %  claimed %  joint  loss')
  for (const centreSd of [0.3, 0.1]) {
    for (const care of ['quick', 'balanced', 'careful'] as const) {
      const r = runPlanner({ sets: truths, centreSd, care, random })
      print(`${String(centreSd).padEnd(11)}${care.padEnd(10)}${r.minutes.toFixed(0).padEnd(9)}${r.prints.toFixed(1).padEnd(8)}${percent(r.withinOneStep).padEnd(17)}${percent(r.claimed).padEnd(11)}${r.joint.toFixed(3).padEnd(7)}${r.loss.toFixed(3)}`)
    }
  }
}
