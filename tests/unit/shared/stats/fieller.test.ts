import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { circleExtremes, fieller } from '#shared/stats/index.ts'

const base = {
  numerator: 10,
  denominator: 5,
  numeratorVariance: 1,
  denominatorVariance: 0.25,
  covariance: 0,
  quantile: 1.96,
}

describe('fieller', () => {
  it('is finite, and not symmetric, where the denominator is clear of zero', () => {
    // Closed form, R 4.2.2.
    const interval = fieller(base)
    expect(interval.kind).toBe('finite')
    if (interval.kind !== 'finite') return
    expect(interval.lower).toBeCloseTo(1.50894595249762, 12)
    expect(interval.upper).toBeCloseTo(2.65085703923269, 12)
  })

  it('is the outside of two roots where only the ratio of signs is known', () => {
    const interval = fieller({ ...base, denominatorVariance: 9 })
    expect(interval.kind).toBe('exclusive')
    if (interval.kind !== 'exclusive') return
    expect(interval.roots[0]).toBeCloseTo(-11.3308823529412, 10)
    expect(interval.roots[1]).toBeCloseTo(0.886363636363636, 12)
  })

  it('is unbounded where nothing is ruled out', () => {
    expect(
      fieller({
        numerator: 1,
        denominator: 0.5,
        numeratorVariance: 1,
        denominatorVariance: 1,
        covariance: 0.1,
        quantile: 1.96,
      }),
    ).toEqual({ kind: 'unbounded' })
  })

  it('turns from finite to exclusive exactly where the denominator equals its own t interval', () => {
    const at = (denominatorVariance: number) => fieller({ ...base, quantile: 2, denominatorVariance }).kind
    expect(at(6.2499)).toBe('finite')
    expect(at(6.25)).toBe('unbounded')
    expect(at(6.2501)).toBe('exclusive')
  })

  it('shrinks to the ratio itself without variance', () => {
    expect(fieller({ ...base, numeratorVariance: 0, denominatorVariance: 0 })).toEqual({
      kind: 'finite',
      lower: 2,
      upper: 2,
    })
  })

  it('is mirrored when the numerator changes its sign', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -100, max: 100, noNaN: true }),
        fc.double({ min: -0.4, max: 0.4, noNaN: true }),
        (numerator, covariance) => {
          const up = fieller({ ...base, numerator, covariance })
          const down = fieller({ ...base, numerator: -numerator, covariance: -covariance })
          if (up.kind !== 'finite' || down.kind !== 'finite') throw new Error('expected finite intervals')
          expect(down.lower).toBeCloseTo(-up.upper, 9)
          expect(down.upper).toBeCloseTo(-up.lower, 9)
        },
      ),
    )
  })
})

describe('circleExtremes', () => {
  it('finds the ends of a plane', () => {
    const ends = circleExtremes((u, v) => 3 * u + 4 * v)
    expect(ends?.lower).toBeCloseTo(-5, 12)
    expect(ends?.upper).toBeCloseTo(5, 12)
  })

  it('gives Fieller for a ratio of two uncorrelated estimates', () => {
    const interval = fieller(base)
    const ends = circleExtremes((u, v) => (10 + 1.96 * u) / (5 + 1.96 * 0.5 * v))
    if (interval.kind !== 'finite') throw new Error('expected a finite interval')
    expect(ends?.lower).toBeCloseTo(interval.lower, 12)
    expect(ends?.upper).toBeCloseTo(interval.upper, 12)
  })

  it('has no ends where the function has none', () => {
    expect(circleExtremes((u, v) => Math.log(u + 0.5) + v)).toBeNull()
  })
})
