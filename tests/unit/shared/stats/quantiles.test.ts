import { describe, expect, it } from 'vitest'
import {
  chiSquareQuantile,
  chiSquareUpperTail,
  fQuantile,
  fUpperTail,
  normalQuantile,
  normalUpperTail,
  tQuantile,
  tTwoSidedTail,
} from '#shared/stats/index.ts'

// Expected values: R 4.2.2, qnorm, qt, qchisq, qf, and pnorm, pt, pchisq, pf with lower.tail = FALSE.
const relative = (value: number, expected: number) => Math.abs(value / expected - 1)

describe('quantiles', () => {
  it.each([
    [normalQuantile(0.975), 1.9599639845400536],
    [normalQuantile(1e-6), -4.7534243088228987],
    [normalQuantile(1 - 1e-6), 4.7534243088170891],
    [normalQuantile(1e-12), -7.0344838253011321],
    [tQuantile(0.975, 1), 12.706204736174694],
    [tQuantile(1 - 1e-6, 1), 318309.88617359026],
    [tQuantile(0.975, 4), 2.7764451051977934],
    [tQuantile(0.975, 22), 2.0738730679040258],
    [chiSquareQuantile(0.95, 1), 3.841458820694124],
    [chiSquareQuantile(0.95, 3), 7.8147279032511792],
    [fQuantile(0.95, 2, 7), 4.7374141277758808],
  ])('agree with R to 11 digits: %s', (value, expected) => {
    expect(relative(value, expected)).toBeLessThan(2e-12)
  })

  it('are mirrored around the middle, and exactly zero there', () => {
    expect(normalQuantile(0.5)).toBe(0)
    expect(tQuantile(0.1, 3)).toBeCloseTo(-tQuantile(0.9, 3), 12)
  })

  it.each([0, 1, -0.1, 1.1, Number.NaN])('refuse the probability %s', probability => {
    for (const ask of [
      () => normalQuantile(probability),
      () => tQuantile(probability, 3),
      () => chiSquareQuantile(probability, 3),
    ]) {
      expect(ask).toThrow(expect.objectContaining({ code: 'probability-out-of-range' }))
    }
  })

  it.each([0, -1, Number.NaN])('refuse %s degrees of freedom', degrees => {
    expect(() => tQuantile(0.9, degrees)).toThrow(expect.objectContaining({ code: 'degrees-out-of-range' }))
  })

  it('give the same value when asked again', () => {
    expect(tQuantile(0.975, 9)).toBe(tQuantile(0.975, 9))
    expect(tQuantile(0.975, 9)).not.toBe(tQuantile(0.975, 10))
  })
})

describe('upper tails', () => {
  it.each([
    [normalUpperTail(8), 6.2209605742717849e-16],
    [tTwoSidedTail(6, 4), 0.003882537046960512],
    [tTwoSidedTail(-6, 4), 0.003882537046960512],
    [fUpperTail(30, 1, 5), 0.002764960301304954],
    [fUpperTail(1e6, 1, 8), 1.1199677445913457e-21],
    [chiSquareUpperTail(30, 1), 4.3204630578274968e-8],
    [chiSquareUpperTail(30, 4), 4.8944371280292126e-6],
  ])('keep ten digits far out: %s', (value, expected) => {
    expect(relative(value, expected)).toBeLessThan(1e-10)
  })

  it('are 1 at nothing and 0 at infinity', () => {
    expect(fUpperTail(0, 2, 3)).toBe(1)
    expect(fUpperTail(Infinity, 2, 3)).toBe(0)
    expect(chiSquareUpperTail(0, 2)).toBe(1)
    expect(tTwoSidedTail(0, 2)).toBe(1)
  })

  it('square with each other: t² is F with one degree of freedom', () => {
    for (const t of [0.3, 2, 9]) expect(fUpperTail(t * t, 1, 7)).toBeCloseTo(tTwoSidedTail(t, 7), 13)
  })
})
