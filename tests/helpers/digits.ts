/**
 * Digits in which a number agrees with the right one: minus log10 of the relative error, at most 15.
 *
 * Where the right one is zero the absolute error counts.
 *
 * @example
 * digitsOfAgreement(1.0001, 1) // => about 4
 */
export function digitsOfAgreement(value: number | undefined, right: number): number {
  if (value === undefined || !Number.isFinite(value)) return -Infinity
  const error = right === 0 ? Math.abs(value) : Math.abs(value / right - 1)
  return Math.min(15, -Math.log10(error))
}
