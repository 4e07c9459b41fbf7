import { describe, expect, it } from 'vitest'
import { fitStraightLine, fitTobit } from '#shared/stats/index.ts'

const design = (exposures: readonly number[]) => exposures.map(exposure => [1, Math.log(exposure)])

/** R 4.2.2, survival 3.5.3, survreg(Surv(d, measured, type = "left") ~ log(E), dist = "gaussian"), tolerance 1e-15. */
const sets = [
  {
    exposures: [6, 8, 10, 12, 16, 24, 40, 60], response: [15, 15, 19, 33, 50, 96, 142, 187], missing: 2,
    coefficients: [-203.2362710035121, 94.2920917003166], sigma: 4.49927375497861, logLikelihood: -17.5371328938333,
    variances: [81.7245901782455, 8.22242904022556],
  },
  {
    exposures: [5, 6, 7, 8, 9, 10, 14, 20, 30, 40], response: [30, 30, 30, 30, 30, 38, 60, 95, 128, 161], missing: 5,
    coefficients: [-170.966639152368, 88.9348707655266], sigma: 3.3829110877402, logLikelihood: -13.3294449936874,
    variances: [76.739693755401, 8.402142784450886],
  },
]

function fitted(data: Parameters<typeof fitTobit>[0]) {
  const outcome = fitTobit(data)
  if (outcome.kind === 'refused') throw new Error(outcome.detail)
  return outcome
}

describe('fitTobit', () => {
  it.each(sets)('agrees with an independent program for $missing missing films', set => {
    const fit = fitted({ design: design(set.exposures), response: set.response, censored: set.response.map((_, i) => i < set.missing) })
    for (const k of [0, 1]) {
      expect((fit.coefficients[k] ?? 0) / (set.coefficients[k] ?? 1)).toBeCloseTo(1, 8)
      expect((fit.covariance[k]?.[k] ?? 0) / (set.variances[k] ?? 1)).toBeCloseTo(1, 7)
    }
    expect(fit.sigma / set.sigma).toBeCloseTo(1, 8)
    expect(fit.logLikelihood).toBeCloseTo(set.logLikelihood, 8)
  })

  it('is least squares when nothing is missing, with the scatter divided by the number of values', () => {
    const { exposures, response } = { exposures: [10, 12, 16, 24, 40, 60], response: [19, 33, 50, 96, 142, 187] }
    const line = fitStraightLine({ x: exposures.map(Math.log), y: response })
    const fit = fitted({ design: design(exposures), response, censored: response.map(() => false) })
    expect(fit.coefficients[1]).toBeCloseTo(line.slope, 8)
    expect(fit.sigma).toBeCloseTo(Math.sqrt(line.residualSumOfSquares / 6), 9)
  })

  it('is not moved by a missing film far below the limit, and is by one that should have been there', () => {
    const exposures = [10, 12, 16, 24, 40, 60]
    const response = [19, 33, 50, 96, 142, 187]
    const slopeWith = (exposure: number) => fitted({ design: design([...exposures, exposure]), response: [...response, 15], censored: [...response.map(() => false), true] }).coefficients[1] ?? 0
    const alone = fitted({ design: design(exposures), response, censored: response.map(() => false) }).coefficients[1] ?? 0
    expect(slopeWith(0.01)).toBeCloseTo(alone, 6)
    expect(slopeWith(12)).toBeGreaterThan(alone + 1)
  })

  it('turns with the units', () => {
    const set = sets[1]
    if (set === undefined) throw new Error('no set')
    const censored = set.response.map((_, i) => i < 5)
    const fit = fitted({ design: design(set.exposures), response: set.response.map(depth => depth / 1000), censored })
    expect(fit.sigma * 1000).toBeCloseTo(set.sigma, 6)
    expect(fit.logLikelihood).toBeCloseTo(set.logLikelihood + 5 * Math.log(1000), 6)
  })

  it('refuses as many measured values as coefficients and takes one more', () => {
    const attempt = (count: number) => fitTobit({ design: design([10, 14, 21, 30]), response: [20, 41, 80, 104], censored: [0, 1, 2, 3].map(i => i >= count) })
    expect(attempt(2)).toMatchObject({ kind: 'refused', reason: 'too-few-measured' })
    // The fourth is censored at 104, which the line through the others reaches about.
    expect(attempt(3)).toMatchObject({ kind: 'fitted' })
  })

  it('refuses values without any scatter', () => {
    expect(fitTobit({ design: [[1, 0], [1, 1], [1, 2], [1, -3]], response: [0, 1, 2, 0], censored: [false, false, false, true] })).toMatchObject({ kind: 'refused' })
  })

  it('throws for columns of unequal length', () => {
    expect(() => fitTobit({ design: [[1], [1]], response: [1, 2], censored: [false] })).toThrow(expect.objectContaining({ code: 'length-mismatch' }))
  })
})
