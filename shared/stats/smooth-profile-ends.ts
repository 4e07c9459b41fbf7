/** The two ends of a likelihood interval; an end is null where the likelihood does not fall far enough within reach. */
export interface SmoothProfileEnds {
  readonly lower: number | null
  readonly upper: number | null
}

/**
 * Ends of the interval around the best value where a smooth profile stays within `drop` of its maximum.
 *
 * Walks outward in growing steps to a bracket, then regula falsi (Illinois) on the signed root of the fall, which is
 * nearly a straight line: about ten profiles for each end, where halving needs fifty.
 *
 * @param profile - profiled log likelihood; minus infinity where there is none
 * @example
 * smoothProfileEnds(x => -(x ** 2) / 2, { best: 0, maximum: 0, drop: 1.92, step: 1, reach: 100 }).upper // => 1.9596
 */
export function smoothProfileEnds(
  profile: (value: number) => number,
  options: { readonly best: number; readonly maximum: number; readonly drop: number; readonly step: number; readonly reach: number },
): SmoothProfileEnds {
  const root = Math.sqrt(options.drop)
  const beyond = (value: number): number => Math.sqrt(Math.max(0, options.maximum - profile(value))) - root
  const end = (direction: 1 | -1): number | null => {
    let inside = options.best
    let insideHeight = -root
    for (let step = options.step; ; step *= 1.6) {
      const outside = inside + direction * step
      if (Math.abs(outside - options.best) > options.reach) return null
      const height = beyond(outside)
      if (height > 0) return between(beyond, [inside, insideHeight], [outside, height])
      inside = outside
      insideHeight = height
    }
  }
  return { lower: end(-1), upper: end(1) }
}

function between(beyond: (value: number) => number, inside: readonly [number, number], outside: readonly [number, number]): number {
  let [a, atA] = inside
  let [b, atB] = outside
  let last: 'inside' | 'outside' | null = null
  for (let i = 0; i < 80; i++) {
    const middle = Number.isFinite(atB) ? b - (atB * (b - a)) / (atB - atA) : (a + b) / 2
    const height = beyond(middle)
    if (Math.abs(height) < 1e-10 || Math.abs(b - a) < 1e-14 * Math.abs(a)) return middle
    // The end that stays a second time counts half: else one end could stay for ever.
    if (height > 0) {
      b = middle
      atB = height
      if (last === 'outside') atA /= 2
      last = 'outside'
    } else {
      a = middle
      atA = height
      if (last === 'inside') atB /= 2
      last = 'inside'
    }
  }
  return a
}
