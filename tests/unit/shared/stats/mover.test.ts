import { describe, expect, it } from 'vitest'
import { lackOfFit, moverSum, negate } from '#shared/stats/index.ts'

describe('moverSum', () => {
  it('adds squared distances on each side by itself', () => {
    // Zou & Donner (2008), equations by hand: √(1² + 2²) below, √(3² + 4²) above.
    const sum = moverSum([
      { value: 10, interval: { kind: 'finite', lower: 9, upper: 13 } },
      { value: 5, interval: { kind: 'finite', lower: 3, upper: 9 } },
    ])
    expect(sum).toEqual({ kind: 'finite', lower: 15 - Math.sqrt(5), upper: 20 })
  })

  it('is the part itself for one part', () => {
    expect(moverSum([{ value: 1, interval: { kind: 'finite', lower: 0.5, upper: 4 } }])).toEqual({
      kind: 'finite',
      lower: 0.5,
      upper: 4,
    })
  })

  it.each([{ kind: 'unbounded' }, { kind: 'exclusive', roots: [1, 2] }] as const)(
    'is unbounded with a part that is %s, in either place',
    open => {
      const part = { value: 1, interval: { kind: 'finite', lower: 0, upper: 2 } } as const
      expect(moverSum([part, { value: 3, interval: open }])).toEqual({ kind: 'unbounded' })
      expect(moverSum([{ value: 3, interval: open }, part])).toEqual({ kind: 'unbounded' })
    },
  )

  it('turns the sides for a difference', () => {
    expect(negate({ value: 2, interval: { kind: 'finite', lower: 1, upper: 5 } })).toEqual({
      value: -2,
      interval: { kind: 'finite', lower: -5, upper: -1 },
    })
  })
})

describe('lackOfFit', () => {
  const x = [2, 2, 2, 3, 5, 5, 8, 12].map(Math.log)
  const y = [40, 46, 43, 88, 130, 141, 190, 228]

  it('agrees with R on unequal replicates', () => {
    // R 4.2.2: anova(lm(y ~ x), lm(y ~ factor(x)))
    const test = lackOfFit({ x, y, residualSumOfSquares: 110.944142097083, parameters: 2 })
    expect(test?.f).toBeCloseTo(0.4133, 4)
    expect(test?.pValue).toBeCloseTo(0.75648, 5)
    expect(test?.pureErrorSumOfSquares).toBeCloseTo(78.5, 10)
    expect([test?.lackOfFitDegreesOfFreedom, test?.pureErrorDegreesOfFreedom]).toEqual([3, 3])
  })

  it('has nothing to test without replicates, or with as many levels as parameters', () => {
    expect(lackOfFit({ x: [1, 2, 3], y: [1, 2, 4], residualSumOfSquares: 1, parameters: 2 })).toBeNull()
    expect(lackOfFit({ x: [1, 1, 2, 2], y: [1, 2, 3, 4], residualSumOfSquares: 1, parameters: 2 })).toBeNull()
  })

  it('does not care for the order of rows', () => {
    const backwards = lackOfFit({
      x: [...x].reverse(),
      y: [...y].reverse(),
      residualSumOfSquares: 110.944142097083,
      parameters: 2,
    })
    const forwards = lackOfFit({ x, y, residualSumOfSquares: 110.944142097083, parameters: 2 })
    expect(backwards?.f).toBeCloseTo(forwards?.f ?? Number.NaN, 12)
  })
})
