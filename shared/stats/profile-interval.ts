/** The two ends of a likelihood region; an end is null where the likelihood never falls far enough on that side. */
export interface ProfileEnds {
  readonly lower: number | null
  readonly upper: number | null
}

/**
 * Ends of the connected region around the best value where a profile stays within `drop` of its maximum.
 *
 * Walks outward in growing steps, then halves the bracket: no smoothness is assumed, so it also serves profiles that
 * level off.
 *
 * @param profile - profiled log likelihood at a value; must be finite
 * @param options.best - value at the maximum
 * @param options.maximum - log likelihood there
 * @param options.drop - half the chi-square quantile (1.92 for 95 %)
 * @param options.step - first step, about one standard error
 * @param options.reach - how far from `best` an end is looked for before the side counts as open
 * @example
 * profileInterval(x => -(x ** 2) / 2, { best: 0, maximum: 0, drop: 1.92, step: 1, reach: 100 }).upper // => 1.9596
 */
export function profileInterval(
  profile: (value: number) => number,
  options: { readonly best: number; readonly maximum: number; readonly drop: number; readonly step: number; readonly reach: number },
): ProfileEnds {
  const floor = options.maximum - options.drop
  const end = (direction: 1 | -1): number | null => {
    let inside = options.best
    let step = options.step
    for (;;) {
      const outside = inside + direction * step
      if (Math.abs(outside - options.best) > options.reach) return null
      if (profile(outside) < floor) return bisect(profile, floor, inside, outside)
      inside = outside
      step *= 1.5
    }
  }
  return { lower: end(-1), upper: end(1) }
}

function bisect(profile: (value: number) => number, floor: number, insideStart: number, outsideStart: number): number {
  let inside = insideStart
  let outside = outsideStart
  for (let i = 0; i < 100 && Math.abs(outside - inside) > 1e-13 * (1 + Math.abs(inside)); i++) {
    const middle = (inside + outside) / 2
    if (profile(middle) < floor) outside = middle
    else inside = middle
  }
  return (inside + outside) / 2
}
