/** How numbers are shown: never more digits than the uncertainty leaves. */

import type { Estimate, Interval } from './stats/types.ts'

/**
 * How many decimals a number with this uncertainty deserves; negative for tens and hundreds.
 *
 * The rule of the Particle Data Group (Review of Particle Physics, introduction, "rounding"; from memory): the three
 * leading digits of the uncertainty from 100 to 354 leave two digits, 355 to 949 one, above that it counts as the next
 * power of ten with two.
 *
 * @param uncertainty - half of the interval, or a standard deviation; 0 or infinite means that nothing limits the digits
 * @returns at most 6 and at least -6
 * @example
 * decimalsFor(0.075) // => 2
 * decimalsFor(0.021) // => 3
 */
export function decimalsFor(uncertainty: number): number {
  if (!(uncertainty > 0) || !Number.isFinite(uncertainty)) return 3
  const exponent = Math.floor(Math.log10(uncertainty) + 1e-12)
  const leading = Math.round((uncertainty / 10 ** exponent) * 100)
  // 0.096 counts as 0.10, which has its first digit one place higher and keeps two.
  const decimals = leading <= 354 ? 1 - exponent : -exponent
  return Math.min(6, Math.max(-6, decimals))
}

/** A number with a fixed number of decimals, or rounded to tens where that is negative. @example formatNumber(1234, -2) // => '1200' */
export function formatNumber(value: number, decimals: number): string {
  if (Math.abs(value) >= 1e9 || (value !== 0 && Math.abs(value) < 1e-6))
    return plainSign(value.toPrecision(3))
  if (decimals >= 0) return plainSign(value.toFixed(decimals))
  const unit = 10 ** -decimals
  return plainSign(String(Math.round(value / unit) * unit))
}

/** No "-0.00": a sign that says nothing. The true minus is for sentences; figures keep the hyphen that cells can be typed with. */
const plainSign = (text: string): string => (/^-[0.]+$/.test(text) ? text.slice(1) : text)

/** Ends of an interval in words; only a finite one has two ends to show. */
export function formatInterval(interval: Interval, options: { readonly decimals?: number } = {}): string {
  if (interval.kind === 'unbounded') return 'not determined'
  const [low, high] = interval.kind === 'finite' ? [interval.lower, interval.upper] : interval.roots
  const decimals = options.decimals ?? decimalsFor((high - low) / 2)
  const [lower, upper] = [formatNumber(low, decimals), formatNumber(high, decimals)]
  return interval.kind === 'finite'
    ? `${lower} to ${upper}`
    : `not determined: only ${lower} to ${upper} is ruled out`
}

/**
 * An estimate as it is read aloud: value, unit, and the interval, all to the digits that the interval leaves.
 *
 * @param options.unit - written after the value
 * @example
 * formatEstimate({ value: 1.7031, interval: { kind: 'finite', lower: 1.6302, upper: 1.7799 } }, { unit: 's' }) // => '1.70 s, 1.63 to 1.78'
 */
export function formatEstimate(
  estimate: Pick<Estimate, 'value' | 'interval'>,
  options: { readonly unit?: string } = {},
): string {
  const { value, interval } = estimate
  const unit = options.unit === undefined ? '' : ` ${options.unit}`
  if (interval.kind !== 'finite') {
    return `${formatNumber(value, significantDecimals(value, 2))}${unit}, ${formatInterval(interval)}`
  }
  const half = (interval.upper - interval.lower) / 2
  const decimals = half > 0 ? decimalsFor(half) : significantDecimals(value, 4)
  return `${formatNumber(value, decimals)}${unit}, ${formatInterval(interval, { decimals })}`
}

/** Decimals that leave so many significant digits: for numbers whose uncertainty nobody states. */
export function significantDecimals(value: number, digits: number): number {
  if (value === 0 || !Number.isFinite(value)) return 0
  return Math.min(6, Math.max(-6, digits - 1 - Math.floor(Math.log10(Math.abs(value)) + 1e-12)))
}

/** A length as shown where no uncertainty stands beside it: whole micrometres from 10 µm on. @example formatLength(83.82) // => '84 µm' */
export function formatLength(micrometres: number): string {
  return `${formatNumber(micrometres, Math.abs(micrometres) >= 10 ? 0 : 1)} µm`
}

/** An exposure to three digits with its unit. @example formatExposure(1.7, 'seconds') // => '1.70 s' */
export function formatExposure(exposure: number, exposureKind: 'seconds' | 'mJ/cm2'): string {
  const decimals = Math.max(0, significantDecimals(exposure, 3))
  return `${formatNumber(exposure, decimals)} ${exposureKind === 'seconds' ? 's' : 'mJ/cm²'}`
}
