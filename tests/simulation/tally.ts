import type { Interval } from '#shared/stats/index.ts'

/** What became of one kind of interval over many simulated data sets. */
export interface Coverage {
  /** Share of sets whose interval holds the truth; a set without two ends rules out nothing, or only what lies between its roots. */
  readonly coverage: number
  /** Monte Carlo standard error of the coverage. */
  readonly coverageError: number
  /** Median of (upper − lower) / truth over the finite intervals. */
  readonly medianRelativeWidth: number
  /** Share of sets without a finite interval. */
  readonly notFinite: number
  readonly sets: number
}

export class CoverageTally {
  private hits = 0
  private sets = 0
  private open = 0
  private readonly widths: number[] = []

  add(interval: Interval, truth: number): void {
    this.sets += 1
    if (interval.kind === 'finite') {
      this.widths.push((interval.upper - interval.lower) / Math.abs(truth))
      if (interval.lower <= truth && truth <= interval.upper) this.hits += 1
      return
    }
    this.open += 1
    if (interval.kind === 'unbounded' || truth <= interval.roots[0] || truth >= interval.roots[1])
      this.hits += 1
  }

  /** A data set that gave no fit at all counts as no answer, not as a hit. */
  addRefusal(): void {
    this.refusals += 1
  }

  refusals = 0

  result(): Coverage {
    const coverage = this.sets === 0 ? 0 : this.hits / this.sets
    const sorted = [...this.widths].sort((a, b) => a - b)
    return {
      coverage,
      coverageError: this.sets === 0 ? 0 : Math.sqrt((coverage * (1 - coverage)) / this.sets),
      medianRelativeWidth: sorted[Math.floor(sorted.length / 2)] ?? Infinity,
      notFinite: this.sets === 0 ? 0 : this.open / this.sets,
      sets: this.sets,
    }
  }
}

/** A table for the terminal; the first column left, numbers right. */
export function renderTable(head: readonly string[], rows: readonly (readonly string[])[]): string {
  const widths = head.map((cell, j) => Math.max(cell.length, ...rows.map(row => (row[j] ?? '').length)))
  const line = (row: readonly string[]) =>
    row
      .map((cell, j) => (j === 0 ? cell.padEnd(widths[j] ?? 0) : cell.padStart(widths[j] ?? 0)))
      .join('  ')
      .trimEnd()
  return [line(head), widths.map(width => '-'.repeat(width)).join('  '), ...rows.map(line)].join('\n')
}

export const percent = (share: number, decimals = 1): string => `${(100 * share).toFixed(decimals)} %`

/** "95.1 ±0.4 %" */
export const withError = ({ coverage, coverageError }: Coverage): string =>
  `${(100 * coverage).toFixed(1)} ±${(100 * coverageError).toFixed(1)} %`
