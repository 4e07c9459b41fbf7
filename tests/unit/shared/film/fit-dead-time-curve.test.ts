import { describe, expect, it } from 'vitest'
import { fitDeadTimeCurve, fitWorkingCurve, modelDepthAt, modelExposureForDepth, type DeadTimeFit } from '#shared/film/index.ts'
import { fitNonlinear, tQuantile, type NonlinearModel } from '#shared/stats/index.ts'
import { fittedOnly, measured, scatterMicrometres } from './readings.ts'

const exposures = [1, 1.3, 1.8, 2.5, 4, 6, 9, 13]
const curve = (t: number) => 100 * Math.log((t - 0.5) / 0.3)
const depths = exposures.map((t, i) => curve(t) + (scatterMicrometres[i] ?? 0))
const readings = measured(exposures, depths)
const fit = fittedOnly(fitDeadTimeCurve({ readings, exposureKind: 'seconds' }))

/** Smallest sum of squares with one parameter of some form of the curve held at a value. */
function squaresWithHeld(model: NonlinearModel, start: readonly number[], heldIndex: number, value: number): number {
  const starts = [start.map((own, k) => (k === heldIndex ? value : own))]
  const outcome = fitNonlinear({ x: exposures, y: depths, model, starts, held: start.map((_, k) => k === heldIndex) })
  if (outcome.kind === 'refused') throw new Error(outcome.detail)
  return outcome.residualSumOfSquares
}

const bound = fit.residualSumOfSquares * (1 + tQuantile(0.975, fit.degreesOfFreedom) ** 2 / fit.degreesOfFreedom)

describe('fitDeadTimeCurve', () => {
  it('finds the dead time, Dp and critical time of films without scatter', () => {
    const exact = fittedOnly(fitDeadTimeCurve({ readings: measured(exposures, exposures.map(curve)), exposureKind: 'seconds' }))
    expect(exact.deadTime.value).toBeCloseTo(0.5, 7)
    expect(exact.penetrationDepthMicrometres.value).toBeCloseTo(100, 5)
    expect(exact.criticalExposure.value).toBeCloseTo(0.3, 7)
  })

  it('is the straight line when the dead time found is nought, and finds a light that stays on too long', () => {
    const early = fittedOnly(fitDeadTimeCurve({ readings: measured(exposures, exposures.map(t => 80 * Math.log((t + 0.4) / 0.7))), exposureKind: 'seconds' }))
    expect(early.deadTime.value).toBeCloseTo(-0.4, 6)
    const straight = measured(exposures, exposures.map(t => 80 * Math.log(t / 0.7)))
    const line = fittedOnly(fitWorkingCurve({ readings: straight, exposureKind: 'seconds' }))
    const same = fittedOnly(fitDeadTimeCurve({ readings: straight, exposureKind: 'seconds' }))
    expect(same.deadTime.value).toBeCloseTo(0, 6)
    expect(same.penetrationDepthMicrometres.value).toBeCloseTo(line.penetrationDepthMicrometres.value, 5)
  })

  // An interval is right when the best fit with the parameter held at its end is worse by exactly t² s².
  it.each<[string, NonlinearModel, number[], number, (own: DeadTimeFit) => { interval: DeadTimeFit['deadTime']['interval'] }]>([
    ['dead time', ([a = 0, b = 0, t0 = 0]) => t => a + b * Math.log(t - t0), [120, 100, 0.49], 2, own => own.deadTime],
    ['Dp', ([a = 0, b = 0, t0 = 0]) => t => a + b * Math.log(t - t0), [120, 100, 0.49], 1, own => own.penetrationDepthMicrometres],
    ['critical time', ([tc = 1, b = 0, t0 = 0]) => t => b * Math.log((t - t0) / tc), [0.3, 100, 0.49], 0, own => own.criticalExposure],
    ['exposure for 100 µm', ([at = 1, b = 0, t0 = 0]) => t => 100 + b * Math.log((t - t0) / (at - t0)), [1.3, 100, 0.49], 0, own => {
      const answer = modelExposureForDepth(own, 100)
      return { interval: answer.kind === 'answered' ? answer.meanInterval : { kind: 'unbounded' } }
    }],
  ])('gives the profile interval of the %s', (_, model, start, heldIndex, part) => {
    const { interval } = part(fit)
    if (interval.kind !== 'finite') throw new Error('the interval must be finite')
    for (const end of [interval.lower, interval.upper]) {
      expect(squaresWithHeld(model, start, heldIndex, end) / bound).toBeCloseTo(1, 2)
    }
  })

  it('answers depths and exposures that undo each other', () => {
    for (const depth of [60, 100, 250]) {
      const answer = modelExposureForDepth(fit, depth)
      if (answer.kind !== 'answered') throw new Error(answer.detail)
      expect(modelDepthAt(fit, answer.value).depthMicrometres).toBeCloseTo(depth, 8)
    }
    const band = modelDepthAt(fit, 3).confidenceInterval
    expect(band).toMatchObject({ kind: 'finite' })
    if (band.kind === 'finite') {
      expect(band.lower).toBeLessThan(modelDepthAt(fit, 3).depthMicrometres)
      expect(band.upper).toBeGreaterThan(modelDepthAt(fit, 3).depthMicrometres)
    }
  })

  it('turns with the unit of time and leaves Dp: a minute has sixty seconds', () => {
    const inMilliseconds = fittedOnly(fitDeadTimeCurve({ readings: measured(exposures.map(t => 1000 * t), depths), exposureKind: 'seconds' }))
    expect(inMilliseconds.deadTime.value / 1000).toBeCloseTo(fit.deadTime.value, 7)
    expect(inMilliseconds.penetrationDepthMicrometres.value).toBeCloseTo(fit.penetrationDepthMicrometres.value, 5)
    if (inMilliseconds.deadTime.interval.kind !== 'finite' || fit.deadTime.interval.kind !== 'finite') throw new Error('finite')
    expect(inMilliseconds.deadTime.interval.lower / 1000).toBeCloseTo(fit.deadTime.interval.lower, 7)
  })

  it('is the fit of every single film where exposures have unequal numbers of them', () => {
    const at = [1, 1, 1, 1.3, 1.8, 1.8, 2.5, 4, 6, 6, 6, 6, 9]
    const films = at.map((t, i) => curve(t) + (scatterMicrometres[i % 10] ?? 0))
    const own = fittedOnly(fitDeadTimeCurve({ readings: measured(at, films), exposureKind: 'seconds' }))
    const direct = fitNonlinear({ x: at, y: films, model: ([a = 0, b = 0, t0 = 0]) => t => a + b * Math.log(t - t0), starts: [[120, 100, 0.49]] })
    if (direct.kind === 'refused') throw new Error(direct.detail)
    expect(own.degreesOfFreedom).toBe(10)
    expect(own.residualSumOfSquares / direct.residualSumOfSquares).toBeCloseTo(1, 9)
    expect(own.deadTime.value).toBeCloseTo(direct.parameters[2] ?? Number.NaN, 6)
    expect(own.deadTime.standardError / (direct.standardErrors[2] ?? Number.NaN)).toBeCloseTo(1, 5)
    for (const [i, residual] of direct.residuals.entries()) expect(own.residuals[i]).toBeCloseTo(residual, 5)
  })

  it('leaves the dead time open where films cannot bound it from below', () => {
    const few = measured([4, 5, 6, 7, 8], [200, 224, 240, 258, 268].map((depth, i) => depth + 4 * (scatterMicrometres[i] ?? 0)))
    const outcome = fitDeadTimeCurve({ readings: few, exposureKind: 'seconds' })
    if (outcome.kind === 'fitted') expect(outcome.deadTime.interval.kind).toBe('unbounded')
    else expect(['not-identified', 'not-converged']).toContain(outcome.reason)
  })

  it('refuses three exposures and takes four', () => {
    const three = measured([1, 1, 2, 2, 4, 4], [50, 52, 120, 118, 190, 193])
    expect(fitDeadTimeCurve({ readings: three, exposureKind: 'seconds' })).toMatchObject({ kind: 'refused', reason: 'too-few-levels' })
    const four = measured(exposures.slice(0, 4), depths.slice(0, 4))
    expect(fitDeadTimeCurve({ readings: four, exposureKind: 'seconds' })).toMatchObject({ kind: 'fitted', degreesOfFreedom: 1 })
  })
})
