/**
 * Smallest and largest value of a smooth function on the unit circle.
 *
 * With u and v as the standardised deviations of two uncorrelated estimates, times the t quantile, the extremes are the
 * ends of the profile-likelihood interval of any function of the two. For a ratio they are Fieller's.
 *
 * @returns null where the function is not finite everywhere: then there are no two ends
 * @example
 * circleExtremes((u, v) => 3 * u + 4 * v) // => { lower: -5, upper: 5 }
 */
export function circleExtremes(
  value: (u: number, v: number) => number,
): { lower: number; upper: number } | null {
  const samples = 48
  const step = (2 * Math.PI) / samples
  const at = (angle: number): number => value(Math.cos(angle), Math.sin(angle))
  let lowest = 0
  let highest = 0
  const values: number[] = []
  for (let i = 0; i < samples; i++) {
    const sample = at(i * step)
    if (!Number.isFinite(sample)) return null
    values.push(sample)
    if (sample < (values[lowest] ?? 0)) lowest = i
    if (sample > (values[highest] ?? 0)) highest = i
  }
  return {
    lower: -peak(angle => -at(angle), (lowest - 1) * step, (lowest + 1) * step),
    upper: peak(at, (highest - 1) * step, (highest + 1) * step),
  }
}

/** Golden-section search for the maximum of a function with one peak between two angles. */
function peak(f: (angle: number) => number, from: number, to: number): number {
  const ratio = (Math.sqrt(5) - 1) / 2
  let [low, high] = [from, to]
  let a = high - ratio * (high - low)
  let b = low + ratio * (high - low)
  let [fa, fb] = [f(a), f(b)]
  // 40 steps shrink 0.26 rad to 1e-9; the maximum is flat, so its value is right to the last digits.
  for (let i = 0; i < 40; i++) {
    if (fa > fb) {
      high = b
      b = a
      fb = fa
      a = high - ratio * (high - low)
      fa = f(a)
    } else {
      low = a
      a = b
      fa = fb
      b = low + ratio * (high - low)
      fb = f(b)
    }
  }
  return Math.max(fa, fb)
}
