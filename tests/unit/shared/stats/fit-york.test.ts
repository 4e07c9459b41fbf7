import { describe, expect, it } from 'vitest'
import { fitStraightLine, fitYork } from '#shared/stats/index.ts'

const x = [0.9, 1.8, 2.6, 3.3, 4.4, 5.2]
const y = [5.4, 4.4, 4.6, 3.5, 3.7, 2.8]
const xStandardUncertainties = [0.05, 0.1, 0.1, 0.2, 0.15, 0.1]
const yStandardUncertainties = [0.4, 0.3, 0.3, 0.2, 0.2, 0.3]

function fitted(data: Parameters<typeof fitYork>[0]) {
  const outcome = fitYork(data)
  if (outcome.kind === 'refused') throw new Error(outcome.detail)
  return outcome
}

describe('fitYork', () => {
  it('is weighted least squares where x is exact', () => {
    const line = fitStraightLine({ x, y, weights: yStandardUncertainties.map(u => 1 / u ** 2) })
    const fit = fitted({ x, y, xStandardUncertainties: x.map(() => 0), yStandardUncertainties })
    expect(fit.slope).toBeCloseTo(line.slope, 12)
    expect(fit.slopeStandardError).toBeCloseTo(1 / Math.sqrt(line.sumSquaresX), 12)
    expect(fit.chiSquare).toBeCloseTo(line.residualSumOfSquares, 10)
    expect(fit.adjustedX).toEqual(x.map(value => expect.closeTo(value, 12)))
  })

  it('gives the inverse line when x and y change places', () => {
    const correlations = x.map((_, i) => [0.3, -0.4, 0, 0.2, 0.5, -0.1][i] ?? 0)
    const fit = fitted({ x, y, xStandardUncertainties, yStandardUncertainties, correlations })
    const turned = fitted({ x: y, y: x, xStandardUncertainties: yStandardUncertainties, yStandardUncertainties: xStandardUncertainties, correlations })
    expect(turned.slope).toBeCloseTo(1 / fit.slope, 10)
    expect(turned.chiSquare).toBeCloseTo(fit.chiSquare, 9)
    expect(turned.adjustedY).toEqual(fit.adjustedX.map(value => expect.closeTo(value, 9)))
  })

  it('puts the adjusted points on the line', () => {
    const fit = fitted({ x, y, xStandardUncertainties, yStandardUncertainties })
    for (const [i, at] of fit.adjustedX.entries()) expect(fit.adjustedY[i]).toBeCloseTo(fit.intercept + fit.slope * at, 10)
  })

  it('keeps its digits where x has a large offset', () => {
    const near = fitted({ x, y, xStandardUncertainties, yStandardUncertainties })
    const far = fitted({ x: x.map(value => value + 1e6), y, xStandardUncertainties, yStandardUncertainties })
    expect(far.slope).toBeCloseTo(near.slope, 8)
    expect(far.mswd).toBeCloseTo(near.mswd, 7)
  })

  it('refuses two points and points of one x', () => {
    const two = [0.1, 0.1]
    expect(fitYork({ x: [1, 2], y: [1, 2], xStandardUncertainties: two, yStandardUncertainties: two })).toMatchObject({ kind: 'refused', reason: 'too-few-points' })
    expect(fitYork({ x: x.map(() => 1), y, xStandardUncertainties, yStandardUncertainties })).toMatchObject({ kind: 'refused', reason: 'no-spread' })
  })

  it.each([
    ['length-mismatch', { correlations: [0] }],
    ['uncertainty-out-of-range', { yStandardUncertainties: [0.4, 0.3, 0.3, 0, 0.2, 0.3] }],
    ['uncertainty-out-of-range', { xStandardUncertainties: [-0.1, 0.1, 0.1, 0.1, 0.1, 0.1] }],
    ['correlation-out-of-range', { correlations: [0, 0, 0, 0, 0, 1] }],
  ])('throws %s for a call that cannot be meant', (code, part) => {
    expect(() => fitYork({ x, y, xStandardUncertainties, yStandardUncertainties, ...part })).toThrow(expect.objectContaining({ code }))
  })
})
