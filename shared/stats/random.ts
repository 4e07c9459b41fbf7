/** A source of uniform numbers in [0, 1); always an argument, never global. */
export type RandomSource = () => number

/**
 * A repeatable source for simulations and for answers that must not flicker (sfc32 by C. Doty-Humphrey).
 *
 * @example
 * const random = seededRandom(7)
 * random() === seededRandom(7)() // => true
 */
export function seededRandom(seed: number): RandomSource {
  let a = seed >>> 0
  let b = Math.imul(seed, 0x9e3779b9) >>> 0
  let c = 0x2545f491
  let counter = 1
  const next = () => {
    const t = (((a + b) >>> 0) + counter) >>> 0
    counter = (counter + 1) >>> 0
    a = b ^ (b >>> 9)
    b = (c + (c << 3)) >>> 0
    c = (((c << 21) | (c >>> 11)) + t) >>> 0
    return t / 4294967296
  }
  // The first words still show the seed.
  for (let i = 0; i < 15; i++) next()
  return next
}

/** A standard normal number by the polar method of Marsaglia. */
export function randomNormal(random: RandomSource): number {
  for (;;) {
    const u = 2 * random() - 1
    const v = 2 * random() - 1
    const s = u * u + v * v
    if (s > 0 && s < 1) return u * Math.sqrt((-2 * Math.log(s)) / s)
  }
}
