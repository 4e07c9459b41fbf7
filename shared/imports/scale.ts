import type { ExposureUnit, LengthUnit } from './unit-words.ts'

/** Powers of ten go into the exponent of the decimal text, so that 0.07 mm is 70 µm and not 70.00000000000001. */
interface Scale {
  readonly power: number
  readonly factor: number
}

/** To seconds, or to mJ/cm² (1 mJ/cm² = 10 J/m²). */
const exposureScale: Readonly<Record<ExposureUnit, Scale>> = {
  s: { power: 0, factor: 1 },
  ms: { power: -3, factor: 1 },
  'mJ/cm2': { power: 0, factor: 1 },
  'J/m2': { power: -1, factor: 1 },
}

/** To micrometres (1 inch = 25.4 mm exactly; 1 mil = a thousandth of it). */
const lengthScale: Readonly<Record<LengthUnit, Scale>> = {
  um: { power: 0, factor: 1 },
  mm: { power: 3, factor: 1 },
  mil: { power: -1, factor: 254 },
  in: { power: 2, factor: 254 },
}

type Decimal = { readonly mantissa: string; readonly exponent: number }

const scaled = (decimal: Decimal, scale: Scale) => Number(`${decimal.mantissa}e${decimal.exponent + scale.power}`) * scale.factor

/** A decimal number in an exposure unit as seconds or mJ/cm²; may be infinite where the text says so. */
export const exposureOf = (decimal: Decimal, unit: ExposureUnit): number => scaled(decimal, exposureScale[unit])

/** A decimal number in a length unit as micrometres; may be infinite where the text says so. */
export const micrometresOf = (decimal: Decimal, unit: LengthUnit): number => scaled(decimal, lengthScale[unit])

/** Whether a unit measures time: such a column belongs to a study in seconds. */
export const isTimeUnit = (unit: ExposureUnit): boolean => unit === 's' || unit === 'ms'
