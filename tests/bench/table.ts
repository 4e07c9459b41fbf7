import type { BenchResult } from './types.ts'

/** Whether the measured ratio reaches its aim. */
export function isMet({ ratio, aim, higherIsBetter }: BenchResult): boolean {
  return higherIsBetter ? ratio >= aim : ratio <= aim
}

const digits = (value: number) => (value >= 100 ? value.toFixed(0) : value.toPrecision(3))

/**
 * The measurements as a table in plain text, one line each.
 *
 * @example
 * formatTable([{ name: 'import', ours: 1.2, yardstick: 1, unit: 's', ratio: 1.2, aim: 1.5, higherIsBetter: false }])
 */
export function formatTable(results: readonly BenchResult[]): string {
  const rows = [
    ['what', 'ours', 'yardstick', 'unit', 'ratio', 'aim', ''],
    ...results.map(result => [
      result.name, digits(result.ours), digits(result.yardstick), result.unit, digits(result.ratio),
      `${result.higherIsBetter ? '≥' : '≤'} ${result.aim}`, isMet(result) ? 'met' : 'MISSED',
    ]),
  ]
  const columns = rows[0]?.map((_, column) => Math.max(...rows.map(row => row[column]?.length ?? 0))) ?? []
  return rows.map(row => row.map((cell, column) => cell.padEnd(columns[column] ?? 0)).join('  ').trimEnd()).join('\n')
}
