export type CsvValue = string | number | null

/** A number as programs write it: such a cell is data, whatever sign it starts with. */
const plainNumber = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/

/** Spreadsheets take a cell that starts like this for a formula, also when it is quoted. */
const formulaStart = /^[=+\-@\t\r]/

/**
 * One cell of a CSV file (RFC 4180). Text that a spreadsheet would take for a formula gets a leading apostrophe; plain
 * numbers stay as they are, so that R and pandas read them as numbers.
 *
 * @throws {RangeError} for a number that is not finite: there is no honest way to write it
 * @example
 * csvCell('=1+1') // => "'=1+1"
 * csvCell(-3.5) // => '-3.5'
 */
export function csvCell(value: CsvValue, delimiter = ','): string {
  if (value === null) return ''
  if (typeof value === 'number') {
    if (!Number.isFinite(value)) throw new RangeError('a CSV cell takes finite numbers only')
    return String(value)
  }
  const text = formulaStart.test(value) && !plainNumber.test(value) ? `'${value}` : value
  const mustQuote = text.includes(delimiter) || /["\r\n]|^\s|\s$/.test(text)
  return mustQuote ? `"${text.replaceAll('"', '""')}"` : text
}

/**
 * Rows as CSV text, each line ended by CR LF as RFC 4180 has it.
 *
 * @example
 * toCsv([['exposure_seconds', 'note'], [1.7, 'a, b']]) // => 'exposure_seconds,note\r\n1.7,"a, b"\r\n'
 */
export function toCsv(rows: readonly (readonly CsvValue[])[], options: { readonly delimiter?: string } = {}): string {
  const delimiter = options.delimiter ?? ','
  return rows.map(row => `${row.map(cell => csvCell(cell, delimiter)).join(delimiter)}\r\n`).join('')
}
