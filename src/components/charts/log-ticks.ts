/** Mantissas from the sparsest set to the densest. */
const sets = [[1], [1, 3], [1, 2, 5], [1, 1.5, 2, 3, 5, 7], [1, 1.2, 1.5, 2, 2.5, 3, 4, 5, 6, 8]] as const
const digits = (value: number) => Number(value.toPrecision(6))

/**
 * Round values for a log axis: the densest set of mantissas that leaves at most `most` of them.
 *
 * @example
 * logTicks(1.4, 9, 7) // => [1.5, 2, 3, 5, 7]
 */
export function logTicks(min: number, max: number, most: number): readonly number[] {
  let best: readonly number[] = []
  for (const mantissas of sets) {
    const ticks: number[] = []
    for (let decade = Math.floor(Math.log10(min)); decade <= Math.ceil(Math.log10(max)); decade++) {
      for (const mantissa of mantissas) {
        const value = digits(mantissa * 10 ** decade)
        if (value >= min && value <= max) ticks.push(value)
      }
    }
    if (ticks.length <= most && ticks.length >= best.length) best = ticks
  }
  return best
}
