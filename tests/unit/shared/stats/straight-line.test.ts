import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { fitStraightLine } from '#shared/stats/index.ts'

describe('fitStraightLine', () => {
  it('keeps 10 digits at an offset of a million', () => {
    // R 4.2.2: lm(y ~ I(x - 1e6))
    const line = fitStraightLine({ x: [1, 2, 3, 4, 7].map(x => 1e6 + x), y: [2.1, 3.9, 6.2, 7.8, 14.1] })
    expect(line.slope).toBeCloseTo(2.002830188679245, 12)
    expect(Math.sqrt(line.residualSumOfSquares / line.degreesOfFreedom)).toBeCloseTo(0.18958743688972365, 12)
    expect(line.meanY - line.slope * (line.meanX - 1e6)).toBeCloseTo(0.010377358490567512, 9)
  })

  it('agrees with R on weights and unequal replicates', () => {
    // R 4.2.2: lm(y ~ x, weights = 1 / u^2)
    const u = [3, 3, 4, 5, 5, 6, 8, 10]
    const line = fitStraightLine({
      x: [2, 2, 2, 3, 5, 5, 8, 12].map(Math.log),
      y: [40, 46, 43, 88, 130, 141, 190, 228],
      weights: u.map(value => 1 / value ** 2),
    })
    expect(line.intercept).toBeCloseTo(-28.086590695887764, 10)
    expect(line.slope).toBeCloseTo(102.69751936853176, 10)
    expect(Math.sqrt(line.residualSumOfSquares / 6)).toBeCloseTo(0.9337732694284776, 12)
    expect(line.leverages[0]).toBeCloseTo(0.36138052918292141, 12)
    expect(line.leverages[4]).toBeCloseTo(0.26990420297271528, 12)
    expect(line.leverages[7]).toBeCloseTo(0.27069356538354772, 12)
  })

  it('is the same for weights all multiplied by one number', () => {
    const x = [1, 2, 4, 7]
    const y = [3, 1, 4, 1]
    const plain = fitStraightLine({ x, y, weights: [1, 2, 1, 3] })
    const scaled = fitStraightLine({ x, y, weights: [10, 20, 10, 30] })
    expect(scaled.slope).toBeCloseTo(plain.slope, 14)
    expect(scaled.leverages[1]).toBeCloseTo(plain.leverages[1] ?? 0, 14)
  })

  it('leaves leverages that add up to two, whatever the points', () => {
    fc.assert(
      fc.property(
        fc.uniqueArray(fc.integer({ min: -1000, max: 1000 }), { minLength: 2, maxLength: 30 }),
        x => {
          const line = fitStraightLine({ x, y: x.map((value, i) => value * 0.3 + (i % 5)) })
          expect(line.leverages.reduce((a, b) => a + b, 0)).toBeCloseTo(2, 9)
          expect(line.residuals.reduce((a, b) => a + b, 0)).toBeCloseTo(0, 8)
        },
      ),
    )
  })

  it.each([
    ['length-mismatch', { x: [1, 2], y: [1] }],
    ['length-mismatch', { x: [1, 2], y: [1, 2], weights: [1] }],
    ['too-few-points', { x: [1], y: [1] }],
    ['no-spread', { x: [3, 3, 3], y: [1, 2, 3] }],
    ['weight-out-of-range', { x: [1, 2, 3], y: [1, 2, 3], weights: [1, 0, 1] }],
    ['weight-out-of-range', { x: [1, 2, 3], y: [1, 2, 3], weights: [1, 1, Number.NaN] }],
  ])('throws %s', (code, data) => {
    expect(() => fitStraightLine(data)).toThrow(expect.objectContaining({ code }))
  })
})
