import { describe, expect, it } from 'vitest'
import { fitStraightLine, leastSquares } from '#shared/stats/index.ts'
import { compensatedSum } from '#shared/stats/compensated-sum.ts'

describe('leastSquares', () => {
  it('agrees with R on a parabola in ln x', () => {
    // R 4.2.2: lm(C ~ log(E) + I(log(E)^2))
    const x = [15, 20, 30, 40, 60, 80, 100, 120].map(Math.log)
    const fit = leastSquares({
      design: x.map(value => [1, value, value * value]),
      y: [42.55, 66.31, 110.86, 142.63, 177.18, 206.94, 233.26, 244.49],
    })
    expect(fit.kind).toBe('fitted')
    if (fit.kind !== 'fitted') return
    const expected = [-249.26436664250781, 111.39805115980134, -1.6240807506981585]
    for (const [i, value] of expected.entries()) expect(fit.coefficients[i]).toBeCloseTo(value, 9)
    expect(fit.standardErrors[2]).toBeCloseTo(2.9095487022704156, 9)
  })

  it('gives twelve digits for a polynomial of fifth degree that fits exactly', () => {
    // All coefficients 1, as in the sets of Wampler (1970).
    const x = Array.from({ length: 21 }, (_, i) => i)
    const design = x.map(value => [0, 1, 2, 3, 4, 5].map(power => value ** power))
    const exact = design.map(row => row.reduce((a, b) => a + b, 0))
    const fit = leastSquares({ design, y: exact })
    expect(fit.kind).toBe('fitted')
    if (fit.kind !== 'fitted') return
    for (const value of fit.coefficients) expect(Math.abs(value - 1)).toBeLessThan(1e-12)
    expect(fit.residualSumOfSquares).toBeLessThan(1e-60)
  })

  it('is the straight line for two columns, weights included', () => {
    const x = [1, 2, 4, 7, 9]
    const y = [3, 1, 4, 1, 5]
    const weights = [1, 2, 1, 3, 0.5]
    const line = fitStraightLine({ x, y, weights })
    const fit = leastSquares({ design: x.map(value => [1, value]), y, weights })
    expect(fit.kind).toBe('fitted')
    if (fit.kind !== 'fitted') return
    expect(fit.coefficients[0]).toBeCloseTo(line.intercept, 12)
    expect(fit.coefficients[1]).toBeCloseTo(line.slope, 12)
    expect(fit.residualSumOfSquares).toBeCloseTo(line.residualSumOfSquares, 12)
    expect(fit.covariance[1]?.[1]).toBeCloseTo(line.residualSumOfSquares / 3 / line.sumSquaresX, 12)
    for (const [i, residual] of fit.residuals.entries())
      expect(residual).toBeCloseTo(line.residuals[i] ?? Number.NaN, 12)
  })

  it('refuses columns that say the same, wherever the copy stands', () => {
    for (const design of [
      [
        [1, 1, 2],
        [1, 1, 3],
        [1, 1, 5],
        [1, 1, 8],
      ],
      [
        [2, 1, 4],
        [3, 1, 6],
        [5, 1, 10],
        [8, 1, 16],
      ],
    ]) {
      expect(leastSquares({ design, y: [1, 2, 3, 5] })).toMatchObject({
        kind: 'refused',
        reason: 'rank-deficient',
      })
    }
  })

  it('refuses fewer rows than columns, and takes as many', () => {
    expect(leastSquares({ design: [[1, 2]], y: [3] })).toMatchObject({
      kind: 'refused',
      reason: 'too-few-rows',
    })
    expect(
      leastSquares({
        design: [
          [1, 2],
          [1, 3],
        ],
        y: [3, 5],
      }),
    ).toMatchObject({ kind: 'fitted', degreesOfFreedom: 0 })
  })

  it.each([
    ['length-mismatch', { design: [[1], [1]], y: [1] }],
    ['length-mismatch', { design: [[1, 2], [1]], y: [1, 2] }],
    ['weight-out-of-range', { design: [[1], [1]], y: [1, 2], weights: [1, -1] }],
  ])('throws %s', (code, data) => {
    expect(() => leastSquares(data)).toThrow(expect.objectContaining({ code }))
  })
})

it('compensatedSum keeps what a plain sum loses', () => {
  expect(compensatedSum([1e16, 1], [1], [1e16])).toBe(1)
  // 134217729² has 54 bits: its last one is lost in a plain product.
  expect(compensatedSum([134217729 ** 2], [134217729], [134217729])).toBe(-1)
})
