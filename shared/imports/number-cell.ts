import type { DecimalMark } from './detect-decimal-mark.ts'
import { shortened } from './shortened.ts'

/** A number as it stands in a cell: kept as decimal text, so that a unit prefix shifts it without rounding. */
export type NumberCell =
  | { readonly kind: 'number'; readonly mantissa: string; readonly exponent: number; readonly unitText: string }
  | { readonly kind: 'empty' }
  | { readonly kind: 'refused'; readonly reason: NumberRefusal; readonly sentence: string }

export type NumberRefusal =
  | 'huge-field'
  | 'zero-byte'
  | 'formula'
  | 'error-value'
  | 'date-looking'
  | 'ambiguous-separator'
  | 'other-decimal-mark'
  | 'not-a-number'

/** Longer than any number or remark a person types; such a cell is a sign of a lost quotation mark. */
export const cellCharactersMax = 1000

const months = 'jan|feb|mar|mär|apr|may|mai|jun|jul|aug|sep|oct|okt|nov|dec|dez'
const dateLooking = [
  /^\d{4}[-/.]\d{1,2}[-/.]\d{1,2}/,
  /^\d{1,2}[-/.]\d{1,2}[-/.](?:\d{4}|\d{2})(?!\d)/,
  /^\d{1,2}[-/]\d{1,2}$/,
  /^\d{1,2}:\d{2}/,
  new RegExp(`^\\d{1,4}[-/. ]*(?:${months})`, 'i'),
  new RegExp(`^(?:${months})[a-zéû]*[-/. ]*\\d`, 'i'),
]
const errorValue = /^(?:#[\p{L}\d/]+[!?]?|[+-]?(?:nan|inf|infinity|∞)|n\/?a|null|none|undefined|err(?:or)?)$/iu
const spaces = String.raw`[ \u00a0\u2009\u202f'’]`

function shapes(mark: DecimalMark) {
  const own = mark === '.' ? String.raw`\.` : ','
  const other = mark === '.' ? ',' : String.raw`\.`
  return {
    plain: new RegExp(String.raw`^(?:\d+(?:${own}\d*)?|${own}\d+)$`),
    groupedBySpace: new RegExp(String.raw`^\d{1,3}(${spaces})\d{3}(?:\1\d{3})*(?:${own}\d+)?$`),
    groupedByMark: new RegExp(String.raw`^\d{1,3}(?:${other}\d{3})+(?:${own}\d+)?$`),
    ambiguous: new RegExp(String.raw`^\d{1,3}${other}\d{3}$`),
    otherMark: new RegExp(String.raw`^\d*${other}\d+$`),
  }
}
const shapesOf = { '.': shapes('.'), ',': shapes(',') } as const

const refused = (reason: NumberRefusal, sentence: string): NumberCell => ({ kind: 'refused', reason, sentence })

/** A cell that a spreadsheet would calculate. It is text here, whatever it says. */
export function looksLikeFormula(cell: string): boolean {
  const text = cell.trimStart()
  return /^[=@]/.test(text) || /^[+-]\s*[^\s\d.,]/.test(text) || /^[+-].*[(*/]/.test(text) || /^[\t\r]/.test(cell)
}

/**
 * Reads a number cell under a known decimal mark: groups of thousands are taken only where they cannot mean anything
 * else, and what looks like a date, a formula or an error value is refused by name.
 *
 * @example
 * readNumberCell('1.234,5 ms', ',') // => { kind: 'number', mantissa: '1234.5', exponent: 0, unitText: 'ms' }
 * readNumberCell('1,234', '.') // => refused: 'ambiguous-separator'
 */
export function readNumberCell(cell: string, decimalMark: DecimalMark): NumberCell {
  if (cell.length > cellCharactersMax) {
    return refused('huge-field', `has more than ${cellCharactersMax} characters: is a quotation mark missing?`)
  }
  if (cell.includes('\0')) return refused('zero-byte', 'holds a zero byte, which no text file should')
  const text = cell.trim().replace(/^\u2212/, '-')
  if (text === '') return { kind: 'empty' }
  const shown = `“${shortened(text, 40)}”`
  if (errorValue.test(text)) return refused('error-value', `is ${shown}, which is no measured value`)
  if (looksLikeFormula(text)) return refused('formula', `is ${shown}, which looks like a spreadsheet formula; formulas are never calculated here`)
  if (dateLooking.some(shape => shape.test(text))) {
    return refused('date-looking', `is ${shown}, which looks like a date or time: a spreadsheet may have changed a number into one`)
  }
  const parts = /^([+-]?)\s*([\d.,][\d.,\u00a0\u2009\u202f '’]*)(?:[eE]([+-]?\d{1,6}))?(.*)$/su.exec(text)
  const body = parts?.[2]?.trim() ?? ''
  const shape = shapesOf[decimalMark]
  if (parts === null || body === '') return refused('not-a-number', `is ${shown}, which is not a number`)
  if (shape.ambiguous.test(body)) {
    return refused('ambiguous-separator', `is ${shown}: a thousands separator or another decimal mark? Write it without the separator`)
  }
  const plain = shape.plain.test(body)
  if (!plain && !shape.groupedBySpace.test(body) && !shape.groupedByMark.test(body)) {
    if (shape.otherMark.test(body)) {
      return refused('other-decimal-mark', `is ${shown}, but the decimal mark chosen for this file is “${decimalMark}”`)
    }
    return refused('not-a-number', `is ${shown}, which is not a number`)
  }
  const digits = body.replace(decimalMark === '.' ? /[^\d.]/g : /[^\d,]/g, '').replace(',', '.')
  return {
    kind: 'number',
    mantissa: `${parts[1] === '-' ? '-' : ''}${digits}`,
    exponent: Number(parts[3] ?? 0),
    unitText: (parts[4] ?? '').trim(),
  }
}
