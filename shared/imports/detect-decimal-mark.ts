import type { FilmImportMapping } from '../contracts/film-imports.ts'

export type DecimalMark = FilmImportMapping['decimalMark']

const withPoint = /^[+-]?\d*\.\d+(?:[eE][+-]?\d+)?(?:\s*\D*)?$/
const withComma = /^[+-]?\d*,\d+(?:[eE][+-]?\d+)?(?:\s*\D*)?$/
/** Three digits behind one mark may be a thousands separator, so they say less. */
const mayBeGrouped = /^[+-]?[1-9]\d{0,2}[.,]\d{3}(?!\d)/

/**
 * Whether numbers are written 1.7 or 1,7; a point where nothing tells.
 *
 * @param rows - rows of cells, as tokenised
 * @example
 * detectDecimalMark([['1,7', '0,43']]) // => ','
 */
export function detectDecimalMark(rows: readonly (readonly string[])[]): DecimalMark {
  let point = 0
  let comma = 0
  for (const row of rows) {
    for (const cell of row) {
      const text = cell.trim()
      const weight = mayBeGrouped.test(text) ? 0.1 : 1
      if (withPoint.test(text)) point += weight
      if (withComma.test(text)) comma += weight
    }
  }
  return comma > point ? ',' : '.'
}
