import type { ExposureUnit, LengthUnit } from './unit-words.ts'

/** Powers of ten go into the exponent of the decimal text, so that 0.07 mm is 70 µm and not 70.00000000000001. */
interface Scale {
  readonly power: number
  /** Whole numbers: a mil is 254 tenths of a micrometre, and 25.4 itself is not exact in binary. */
  readonly times: number
  readonly dividedBy: number
}

const powerOfTen = (power: number): Scale => ({ power, times: 1, dividedBy: 1 })

/** To seconds, or to mJ/cm² (1 mJ/cm² = 10 J/m²). */
const exposureScale: Readonly<Record<ExposureUnit, Scale>> = {
  s: powerOfTen(0),
  ms: powerOfTen(-3),
  'mJ/cm2': powerOfTen(0),
  'J/m2': powerOfTen(-1),
}

/** To micrometres (1 inch = 25.4 mm exactly; 1 mil = a thousandth of it). */
const lengthScale: Readonly<Record<LengthUnit, Scale>> = {
  um: powerOfTen(0),
  mm: powerOfTen(3),
  mil: { power: 0, times: 254, dividedBy: 10 },
  in: { power: 2, times: 254, dividedBy: 1 },
}

type Decimal = { readonly mantissa: string; readonly exponent: number }

const scaled = (decimal: Decimal, scale: Scale) => (Number(`${decimal.mantissa}e${decimal.exponent + scale.power}`) * scale.times) / scale.dividedBy

/** A decimal number in an exposure unit as seconds or mJ/cm²; may be infinite where the text says so. */
export const exposureOf = (decimal: Decimal, unit: ExposureUnit): number => scaled(decimal, exposureScale[unit])

/** A decimal number in a length unit as micrometres; may be infinite where the text says so. */
export const micrometresOf = (decimal: Decimal, unit: LengthUnit): number => scaled(decimal, lengthScale[unit])

/** Whether a unit measures time: such a column belongs to a study in seconds. */
export const isTimeUnit = (unit: ExposureUnit): boolean => unit === 's' || unit === 'ms'
