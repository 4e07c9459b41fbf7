/** What people type, and how numbers are shown. Inside, lengths are micrometres, exposures seconds or mJ/cm². */

import { readNumberCell, type NumberRefusal } from './imports/number-cell.ts'
import { exposureOf, isTimeUnit, micrometresOf } from './imports/scale.ts'
import {
  exposureUnitOf,
  lengthUnitOf,
  unitLabels,
  type ExposureUnit,
  type LengthUnit,
} from './imports/unit-words.ts'
import { shortened } from './imports/shortened.ts'
import type { Refused } from './stats/types.ts'

export type { ExposureUnit, LengthUnit } from './imports/unit-words.ts'
export { unitLabels } from './imports/unit-words.ts'
export {
  decimalsFor,
  formatEstimate,
  formatExposure,
  formatInterval,
  formatLength,
  formatNumber,
  significantDecimals,
} from './format.ts'

export type UnitRefusal =
  | NumberRefusal
  | 'empty'
  | 'unknown-unit'
  | 'seconds-expected'
  | 'dose-expected'
  | 'not-positive'
  | 'too-large'
  | 'too-small'

/** A number as typed, turned into the canonical unit. */
export interface ParsedQuantity<Unit> {
  readonly kind: 'value'
  /** In micrometres, seconds or mJ/cm². */
  readonly value: number
  /** As typed, or the default where none was. */
  readonly unit: Unit
  /** As typed, without surrounding blanks: what the person meant stays visible. */
  readonly text: string
}

export type ParsedLength = ParsedQuantity<LengthUnit> | Refused<UnitRefusal>
export type ParsedExposure =
  (ParsedQuantity<ExposureUnit> & { readonly exposureKind: 'seconds' | 'mJ/cm2' }) | Refused<UnitRefusal>

type Decimal = { readonly mantissa: string; readonly exponent: number }
type Typed = { readonly decimal: Decimal; readonly unitText: string; readonly text: string }

const refuse = (reason: UnitRefusal, detail: string): Refused<UnitRefusal> => ({
  kind: 'refused',
  reason,
  detail,
})

/**
 * The decimal mark that a single typed number shows by itself.
 *
 * Both marks: the last one is the decimal mark. One mark twice: it groups thousands. One comma: decimal, unless exactly
 * three digits follow a whole number other than zero; then nobody can tell, and the number is refused. One point: decimal.
 */
function decimalMarkOf(text: string): '.' | ',' {
  const point = text.lastIndexOf('.')
  const comma = text.lastIndexOf(',')
  if (comma < 0) return text.indexOf('.') === point ? '.' : ','
  if (point >= 0) return comma > point ? ',' : '.'
  if (text.indexOf(',') !== comma) return '.'
  return /(?:^|\D)0*,\d/.test(text) || !/,\d{3}(?!\d)/.test(text) ? ',' : '.'
}

const sentences: Readonly<Record<NumberRefusal, (shown: string) => string>> = {
  'huge-field': () => 'This is too long for a number.',
  'zero-byte': () => 'This holds a zero byte; type the number again.',
  formula: shown => `${shown} looks like a formula. Type the number itself.`,
  'error-value': shown =>
    `${shown} is no measured value. Leave the cell empty, or choose “no film” or “lost in wash”.`,
  'date-looking': shown => `${shown} looks like a date or a fraction. Type one number, such as 85 or 1.7.`,
  'ambiguous-separator': shown =>
    `${shown} can mean thousands or decimals. Type it without the separator, or with a decimal point.`,
  'other-decimal-mark': shown => `${shown} mixes decimal marks. Type one number, such as 85 or 1.7.`,
  'not-a-number': shown => `${shown} is not a number. Type one number, such as 85 or 1.7.`,
}

function readTyped(typed: string): Typed | Refused<UnitRefusal> {
  // NFKC would turn "m²" into "m2" but also "½" into "1⁄2": only blanks, signs and the plus are evened out here.
  const text = typed.replace(/[\u00a0\u2007\u202f\u2009]/g, ' ').trim()
  const plain = text.replace(/^[\u2212\u2013\u2012]\s*(?=[\d.,])/, '-').replace(/^\+\s*(?=[\d.,])/, '')
  // A sign would make "-5 mJ/cm2" look like a formula, so the sign is put back afterwards.
  const negative = /^-\s*[\d.,]/.test(plain)
  const cell = readNumberCell(negative ? plain.replace(/^-\s*/, '') : plain, decimalMarkOf(plain))
  const shown = `“${shortened(text, 40)}”`
  if (cell.kind === 'empty') return refuse('empty', 'Type a number, such as 85 or 1.7.')
  if (cell.kind === 'refused') return refuse(cell.reason, sentences[cell.reason](shown))
  return {
    decimal: { mantissa: `${negative ? '-' : ''}${cell.mantissa}`, exponent: cell.exponent },
    unitText: cell.unitText,
    text,
  }
}

function checkedValue(
  value: number,
  text: string,
  limits: { positive: boolean; max: number; maxText: string },
): Refused<UnitRefusal> | number {
  if (limits.positive && !(value > 0)) {
    return /[1-9]/.test(text.replace(/e.*/i, '')) && value === 0
      ? refuse('too-small', `“${shortened(text, 40)}” is too small to be meant.`)
      : refuse('not-positive', 'This must be above zero.')
  }
  if (!(Math.abs(value) <= limits.max))
    return refuse('too-large', `“${shortened(text, 40)}” is more than ${limits.maxText}. Is the unit right?`)
  return value === 0 ? 0 : value
}

/**
 * Reads a typed length as micrometres: "85", "85 µm", "0.085 mm", "3.3 mil", "0,0033 in".
 *
 * @param options.defaultUnit - taken where none is typed (@default 'um')
 * @param options.sign - `any`: a film may be typed below zero, and is then marked; `positive` for a layer height (@default 'any')
 * @example
 * parseLength('0,085 mm') // => { kind: 'value', value: 85, unit: 'mm', text: '0,085 mm' }
 */
export function parseLength(
  text: string,
  options: { readonly defaultUnit?: LengthUnit; readonly sign?: 'any' | 'positive' } = {},
): ParsedLength {
  const typed = readTyped(text)
  if ('kind' in typed) return typed
  const unitText = typed.unitText.replace(/^[µμ]$/, 'um')
  const unit = unitText === '' ? (options.defaultUnit ?? 'um') : lengthUnitOf(unitText)
  if (unit === null) {
    return refuse(
      'unknown-unit',
      `“${shortened(typed.unitText, 40)}” is no unit of length here. Use µm, mm, mil or in.`,
    )
  }
  // 100 mm: as the database holds it; no cured film is thicker.
  const value = checkedValue(micrometresOf(typed.decimal, unit), typed.text, {
    positive: options.sign === 'positive',
    max: 100_000,
    maxText: '100 mm',
  })
  return typeof value === 'number' ? { kind: 'value', value, unit, text: typed.text } : value
}

/**
 * Reads a typed exposure as seconds or mJ/cm²: "1,7 s", "1700 ms", "12 mJ/cm²", "120 J/m2".
 *
 * @param options.defaultUnit - taken where none is typed (@default 's')
 * @param options.exposureKind - what the study is kept in; the other kind is refused, since only an irradiance joins them
 * @example
 * parseExposure('1700ms') // => { kind: 'value', value: 1.7, unit: 'ms', text: '1700ms', exposureKind: 'seconds' }
 */
export function parseExposure(
  text: string,
  options: { readonly defaultUnit?: ExposureUnit; readonly exposureKind?: 'seconds' | 'mJ/cm2' } = {},
): ParsedExposure {
  const typed = readTyped(text)
  if ('kind' in typed) return typed
  const fallback = options.defaultUnit ?? (options.exposureKind === 'mJ/cm2' ? 'mJ/cm2' : 's')
  const unit = typed.unitText === '' ? fallback : exposureUnitOf(typed.unitText)
  if (unit === null) {
    return refuse(
      'unknown-unit',
      `“${shortened(typed.unitText, 40)}” is no unit of exposure here. Use s, ms, mJ/cm² or J/m².`,
    )
  }
  const exposureKind = isTimeUnit(unit) ? 'seconds' : 'mJ/cm2'
  if (options.exposureKind !== undefined && options.exposureKind !== exposureKind) {
    return exposureKind === 'seconds'
      ? refuse(
          'dose-expected',
          'This study is kept in mJ/cm², and this is a time. Multiply it by the irradiance in mW/cm².',
        )
      : refuse(
          'seconds-expected',
          'This study is kept in seconds, and this is a dose. Divide it by the irradiance in mW/cm².',
        )
  }
  // 1e9: as the database holds it.
  const value = checkedValue(exposureOf(typed.decimal, unit), typed.text, {
    positive: true,
    max: 1e9,
    maxText: '1e9 s or mJ/cm²',
  })
  return typeof value === 'number' ? { kind: 'value', value, unit, text: typed.text, exposureKind } : value
}

/** How exposures of a kind are written: "s" or "mJ/cm²". */
export const exposureUnitLabel = (exposureKind: 'seconds' | 'mJ/cm2'): string =>
  exposureKind === 'seconds' ? unitLabels.s : unitLabels['mJ/cm2']
