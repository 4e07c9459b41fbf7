import { describe, expect, it } from 'vitest'
import { fitTwoLineAttenuation, modelDepthAt, modelExposureForDepth } from '#shared/film/index.ts'
import { fitNonlinear } from '#shared/stats/index.ts'
import { twoLineDepth, twoLineGradient, twoLineParts } from '../../../../shared/film/two-line-depth.ts'
import { fittedOnly, measured, scatterMicrometres } from './readings.ts'

/** Half of the light with D 50 µm, half with 200 µm, Ec 1. */
const depths = [25, 50, 75, 100, 150, 200, 250]
const exposureFor = (z: number) => 1 / (0.5 * Math.exp(-z / 50) + 0.5 * Math.exp(-z / 200))
const exact = measured(depths.map(exposureFor), depths)
const scattered = measured(depths.map(exposureFor), depths.map((z, i) => z + 0.2 * (scatterMicrometres[i] ?? 0)))
const truth = [0, Math.log(50), Math.log(3), 0]

describe('fitTwoLineAttenuation', () => {
  it.each([undefined, 0.5])('finds both depths and Ec of films without scatter (share given: %s)', shallowShare => {
    const fit = fittedOnly(fitTwoLineAttenuation({ readings: exact, exposureKind: 'mJ/cm2', ...(shallowShare === undefined ? {} : { shallowShare }) }))
    expect(fit.criticalExposure.value).toBeCloseTo(1, 6)
    expect(fit.penetrationDepthsMicrometres[0].value).toBeCloseTo(50, 4)
    expect(fit.penetrationDepthsMicrometres[1].value).toBeCloseTo(200, 3)
    expect(fit.shallowShare.value).toBeCloseTo(0.5, 6)
  })

  it('covers the truth by its intervals, and is surer of Ec with the share given', () => {
    const given = fittedOnly(fitTwoLineAttenuation({ readings: scattered, exposureKind: 'mJ/cm2', shallowShare: 0.5 }))
    const free = fittedOnly(fitTwoLineAttenuation({ readings: scattered, exposureKind: 'mJ/cm2' }))
    for (const fit of [given, free]) {
      const interval = fit.criticalExposure.interval
      if (interval.kind !== 'finite') throw new Error('finite')
      expect(interval.lower).toBeLessThan(1)
      expect(interval.upper).toBeGreaterThan(1)
    }
    expect(given.criticalExposure.standardError).toBeLessThan(free.criticalExposure.standardError)
    expect(given.shallowShare.standardError).toBe(0)
  })

  it('has the standard errors of the same curve fitted in Ec, D1 and D2 themselves', () => {
    const fit = fittedOnly(fitTwoLineAttenuation({ readings: scattered, exposureKind: 'mJ/cm2', shallowShare: 0.5 }))
    const direct = fitNonlinear({
      x: scattered.map(reading => Math.log(reading.exposure)),
      y: scattered.map(reading => reading.depthMicrometres),
      model: ([critical = 1, shallow = 1, deep = 1]) => logExposure => {
        let [low, high] = [-500, 2000]
        for (let i = 0; i < 80; i++) {
          const middle = (low + high) / 2
          const left = Math.exp(logExposure) * (0.5 * Math.exp(-middle / shallow) + 0.5 * Math.exp(-middle / deep))
          if (left > critical) low = middle
          else high = middle
        }
        return (low + high) / 2
      },
      starts: [[1, 50, 200]],
    })
    if (direct.kind === 'refused') throw new Error(direct.detail)
    const own = [fit.criticalExposure, ...fit.penetrationDepthsMicrometres]
    for (const [k, estimate] of own.entries()) {
      expect(estimate.value / (direct.parameters[k] ?? Number.NaN)).toBeCloseTo(1, 5)
      expect(estimate.standardError / (direct.standardErrors[k] ?? Number.NaN)).toBeCloseTo(1, 4)
    }
  })

  it('is the fit of every single film where exposures have unequal numbers of them', () => {
    const at = [...scattered, ...scattered.slice(2, 4), ...scattered.slice(3, 5)].map((reading, i) => ({ ...reading, depthMicrometres: reading.depthMicrometres + 0.1 * Math.cos(9 * i) }))
    const own = fittedOnly(fitTwoLineAttenuation({ readings: at, exposureKind: 'mJ/cm2', shallowShare: 0.5 }))
    const direct = fitNonlinear({
      x: at.map(reading => Math.log(reading.exposure)), y: at.map(reading => reading.depthMicrometres),
      model: coefficients => logExposure => twoLineDepth(twoLineParts(coefficients), logExposure),
      starts: [truth], held: [false, false, false, true],
    })
    if (direct.kind === 'refused') throw new Error(direct.detail)
    expect(own.degreesOfFreedom).toBe(at.length - 3)
    expect(own.residualSumOfSquares / direct.residualSumOfSquares).toBeCloseTo(1, 8)
    expect(own.criticalExposure.value).toBeCloseTo(Math.exp(direct.parameters[0] ?? Number.NaN), 6)
    expect(own.criticalExposure.standardError / (own.criticalExposure.value * (direct.standardErrors[0] ?? Number.NaN))).toBeCloseTo(1, 5)
    for (const [i, residual] of direct.residuals.entries()) expect(own.residuals[i]).toBeCloseTo(residual, 4)
  })

  it('answers depths and exposures that undo each other, with the interval around', () => {
    const fit = fittedOnly(fitTwoLineAttenuation({ readings: scattered, exposureKind: 'mJ/cm2', shallowShare: 0.5 }))
    const answer = modelExposureForDepth(fit, 100)
    if (answer.kind !== 'answered' || answer.meanInterval.kind !== 'finite') throw new Error('finite answer')
    expect(answer.value).toBeCloseTo(2.696, 1)
    expect(modelDepthAt(fit, answer.value).depthMicrometres).toBeCloseTo(100, 9)
    // At an end of the interval the confidence band of the depth just touches the target.
    const band = modelDepthAt(fit, answer.meanInterval.upper).confidenceInterval
    expect(band.kind === 'finite' && band.lower).toBeCloseTo(100, 6)
  })

  it('gives derivatives that agree with differences, above and below the critical exposure', () => {
    for (const logExposure of [-0.5, 0, 0.6, 2, 6]) {
      const gradient = twoLineGradient(truth, logExposure)
      for (const k of [0, 1, 2, 3]) {
        const shifted = (by: number) => twoLineDepth(twoLineParts(truth.map((value, i) => (i === k ? value + by : value))), logExposure)
        expect(gradient[k]).toBeCloseTo((shifted(1e-5) - shifted(-1e-5)) / 2e-5, 5)
      }
    }
  })

  it('refuses films on a straight line: two depths cannot be told there', () => {
    const line = measured([10, 15, 20, 30, 40, 60], [10, 15, 20, 30, 40, 60].map((e, i) => 90 * Math.log(e / 8) + (scatterMicrometres[i] ?? 0)))
    expect(fitTwoLineAttenuation({ readings: line, exposureKind: 'mJ/cm2' }).kind).toBe('refused')
  })

  it.each([0, 1, -0.2, Number.NaN])('throws for the share %s', shallowShare => {
    expect(() => fitTwoLineAttenuation({ readings: exact, exposureKind: 'mJ/cm2', shallowShare })).toThrow(expect.objectContaining({ code: 'share-out-of-range' }))
  })
})
