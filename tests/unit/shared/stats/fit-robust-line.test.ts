import { describe, expect, it } from 'vitest'
import { fitRobustLine, fitStraightLine } from '#shared/stats/index.ts'

const x = [8, 8, 11, 15, 15, 21, 30, 42, 60, 60, 84].map(Math.log)
const y = [31.2, 27.9, 55.8, 84.1, 80.6, 112.9, 144.2, 205.7, 211.3, 205.2, 238.8]

function fitted(data: { readonly x: readonly number[]; readonly y: readonly number[] }) {
  const outcome = fitRobustLine(data)
  if (outcome.kind === 'refused') throw new Error(outcome.detail)
  return outcome
}

describe('fitRobustLine', () => {
  // R knows no scale without the two smallest residuals, but the same line is its fixed point with the tuning constant
  // 4.685 times (that scale over the plain one) = 7.414229516248904.
  it('agrees with an independent program: R 4.2.2, MASS rlm, psi.bisquare, accuracy 1e-13', () => {
    const line = fitted({ x, y })
    expect(line.slope / 89.28451548710312).toBeCloseTo(1, 9)
    expect(line.intercept / -157.9511021473677).toBeCloseTo(1, 9)
    // R's own standard errors are without the factor 1 + 1/n for few points.
    expect(line.slopeStandardError / (0.9916884197416468 * (12 / 11))).toBeCloseTo(1, 8)
    expect(line.interceptStandardError / (3.2346793802985494 * (12 / 11))).toBeCloseTo(1, 8)
    expect(line.scale / 3.573711383080671).toBeCloseTo(1, 8)
    expect(line.robustWeights[0]).toBeCloseTo(0.9150267980247017, 8)
    expect(line.robustWeights[7]).toBe(0)
  })

  it.each([0, 3, 7])('is not moved by one wild point, wherever it stands (row %i)', index => {
    const clean = Array.from({ length: 8 }, (_, i) => 2 + 3 * i + 0.1 * Math.cos(7 * i))
    const wild = clean.map((value, i) => (i === index ? value + 500 : value))
    const at = clean.map((_, i) => i)
    expect(fitted({ x: at, y: wild }).slope).toBeCloseTo(3, 1)
    expect(fitted({ x: at, y: wild }).robustWeights[index]).toBe(0)
    expect(Math.abs(fitStraightLine({ x: at, y: wild }).slope - 3)).toBeGreaterThan(0.5)
  })

  it('gives the line of an exact majority', () => {
    expect(fitted({ x: [1, 2, 3, 4, 5], y: [1, 2, 3, 4, 90] }).slope).toBeCloseTo(1, 9)
  })

  it('turns with the units of y and does not mind the order of rows', () => {
    const line = fitted({ x, y })
    const scaled = fitted({ x: [...x].reverse(), y: y.map(value => value / 1000).reverse() })
    expect(scaled.slope * 1000).toBeCloseTo(line.slope, 7)
    expect(scaled.slopeStandardError * 1000).toBeCloseTo(line.slopeStandardError, 7)
    expect([...scaled.robustWeights].reverse()[7]).toBe(0)
  })

  it('refuses four points and takes five; refuses points of one x', () => {
    expect(fitRobustLine({ x: [1, 2, 3, 4], y: [1, 2, 3.1, 3.9] })).toMatchObject({ kind: 'refused', reason: 'too-few-points' })
    expect(fitRobustLine({ x: [1, 2, 3, 4, 5], y: [1, 2, 3.1, 3.9, 5.1] })).toMatchObject({ kind: 'fitted' })
    expect(fitRobustLine({ x: [2, 2, 2, 2, 2], y: [1, 2, 3.1, 3.9, 4] })).toMatchObject({ kind: 'refused', reason: 'no-spread' })
  })

  it('throws for columns of unequal length', () => {
    expect(() => fitRobustLine({ x: [1, 2, 3, 4], y: [1, 2, 3] })).toThrow(expect.objectContaining({ code: 'length-mismatch' }))
  })
})
