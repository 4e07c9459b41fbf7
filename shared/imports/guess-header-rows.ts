import type { DecimalMark } from './detect-decimal-mark.ts'
import { readNumberCell } from './number-cell.ts'

/**
 * How many rows stand above the data: everything before the first row with at least two numbers (one, where the file
 * has a single filled column). A file without any such row is taken to have one header row.
 *
 * @example
 * guessHeaderRows([['t', 'd'], ['1.7', '0.43']], '.') // => 1
 */
export function guessHeaderRows(rows: readonly (readonly string[])[], decimalMark: DecimalMark): number {
  const widest = Math.max(0, ...rows.map(row => row.filter(cell => cell.trim() !== '').length))
  const needed = Math.min(2, widest)
  const first = rows.findIndex(row => row.filter(cell => readNumberCell(cell, decimalMark).kind === 'number').length >= needed)
  if (first === -1) return Math.min(1, rows.length)
  // 20 is the most that a mapping can skip.
  return Math.min(first, 20)
}
