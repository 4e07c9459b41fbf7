import { describe, expect, it } from 'vitest'
import {
  censoredExposureForDepth, exposureForDepth, fitCensoredWorkingCurve, fitRobustWorkingCurve, fitWorkingCurve, fitWorkingCurveYork,
  type FilmReading,
} from '#shared/film/index.ts'
import { fittedOnly, measured, scatterMicrometres } from './readings.ts'

const exposures = [8, 11, 15, 21, 30, 42, 60, 84]
const depths = exposures.map((e, i) => 90 * Math.log(e / 6) + (scatterMicrometres[i] ?? 0))
const readings = measured(exposures, depths)

describe('fitRobustWorkingCurve', () => {
  it('says that nothing differs for films that agree', () => {
    const fit = fittedOnly(fitRobustWorkingCurve({ readings, exposureKind: 'mJ/cm2', depthMicrometres: 100 }))
    expect(fit.differs).toBe(false)
    expect(fit.answers).toHaveLength(4)
    expect(fit.penetrationDepthMicrometres.value).toBeCloseTo(fit.straightLine.penetrationDepthMicrometres.value, -1)
  })

  it.each([0, 4, 7])('says so where one wild film moves the answer (film %i), and sets that film aside', index => {
    const wild = measured(exposures, depths.map((depth, i) => (i === index ? depth + 60 : depth)))
    const fit = fittedOnly(fitRobustWorkingCurve({ readings: wild, exposureKind: 'mJ/cm2', depthMicrometres: 100 }))
    expect(fit.robustWeights[index]).toBe(0)
    expect(fit.robustWeights.filter(weight => weight === 0)).toHaveLength(1)
    expect(fit.penetrationDepthMicrometres.value).toBeCloseTo(90, -1)
    expect(fit.differs).toBe(fit.answers.some(answer => answer.outside))
    if (fit.differs) expect(fit.sentence).toContain('sets one film aside')
  })

  it('differs by more than the interval when many good films stand against two wild ones', () => {
    const many = [...exposures, ...exposures, ...exposures]
    const wild = measured(many, many.map((e, i) => 90 * Math.log(e / 6) + (scatterMicrometres[i % 10] ?? 0) + (i === 7 || i === 15 ? 80 : 0)))
    const fit = fittedOnly(fitRobustWorkingCurve({ readings: wild, exposureKind: 'mJ/cm2' }))
    expect(fit.differs).toBe(true)
  })

  it('refuses four films and passes on the refusal of the straight line', () => {
    expect(fitRobustWorkingCurve({ readings: readings.slice(0, 4), exposureKind: 'seconds' })).toMatchObject({ kind: 'refused', reason: 'too-few-points' })
    expect(fitRobustWorkingCurve({ readings: [], exposureKind: 'seconds' })).toMatchObject({ kind: 'refused', reason: 'no-films' })
  })
})

describe('fitWorkingCurveYork', () => {
  const base = { readings, exposureKind: 'mJ/cm2', depthStandardUncertaintyMicrometres: 1.5 } as const

  it('is the straight line where exposures are exact', () => {
    const line = fittedOnly(fitWorkingCurve({ readings, exposureKind: 'mJ/cm2' }))
    const fit = fittedOnly(fitWorkingCurveYork({ ...base, exposureRelativeUncertainty: 0 }))
    expect(fit.penetrationDepthMicrometres.value).toBeCloseTo(line.penetrationDepthMicrometres.value, 9)
    expect(fit.criticalExposure.value).toBeCloseTo(line.criticalExposure.value, 9)
  })

  it('is surer of nothing when exposures are uncertain', () => {
    const exact = fittedOnly(fitWorkingCurveYork({ ...base, exposureRelativeUncertainty: 0 }))
    const uncertain = fittedOnly(fitWorkingCurveYork({ ...base, exposureRelativeUncertainty: 0.05 }))
    expect(uncertain.penetrationDepthMicrometres.standardError).toBeGreaterThan(exact.penetrationDepthMicrometres.standardError)
    expect(uncertain.line.mswd).toBeLessThan(exact.line.mswd)
  })

  it('lets a common scale error of the meter widen Ec and leave Dp, and ignores it in seconds', () => {
    const options = { ...base, exposureRelativeUncertainty: 0.02 }
    const plain = fittedOnly(fitWorkingCurveYork(options))
    const scaled = fittedOnly(fitWorkingCurveYork({ ...options, scaleRelativeUncertainty: 0.1 }))
    expect(scaled.penetrationDepthMicrometres).toEqual(plain.penetrationDepthMicrometres)
    expect(scaled.criticalExposure.value).toBe(plain.criticalExposure.value)
    const relative = scaled.criticalExposure.standardError / scaled.criticalExposure.value
    expect(relative ** 2 - (plain.criticalExposure.standardError / plain.criticalExposure.value) ** 2).toBeCloseTo(0.01, 9)
    if (scaled.criticalExposure.interval.kind !== 'finite' || plain.criticalExposure.interval.kind !== 'finite') throw new Error('finite')
    expect(scaled.criticalExposure.interval.lower).toBeLessThan(plain.criticalExposure.interval.lower * 0.9)
    const inSeconds = fittedOnly(fitWorkingCurveYork({ ...options, exposureKind: 'seconds', scaleRelativeUncertainty: 0.1 }))
    expect(inSeconds.criticalExposure).toEqual(plain.criticalExposure)
  })

  it('moves Ec and not Dp when the meter reads everything 10 % high', () => {
    const options = { ...base, exposureRelativeUncertainty: 0.02 }
    const high = fittedOnly(fitWorkingCurveYork({ ...options, readings: measured(exposures.map(e => 1.1 * e), depths) }))
    const plain = fittedOnly(fitWorkingCurveYork(options))
    expect(high.criticalExposure.value / plain.criticalExposure.value).toBeCloseTo(1.1, 10)
    expect(high.penetrationDepthMicrometres.value).toBeCloseTo(plain.penetrationDepthMicrometres.value, 9)
  })

  it('widens where films scatter more than stated, and not where less', () => {
    const tight = fittedOnly(fitWorkingCurveYork({ ...base, depthStandardUncertaintyMicrometres: 0.2, exposureRelativeUncertainty: 0 }))
    const loose = fittedOnly(fitWorkingCurveYork({ ...base, depthStandardUncertaintyMicrometres: 20, exposureRelativeUncertainty: 0 }))
    expect([tight.widened, loose.widened]).toEqual([true, false])
    expect(loose.penetrationDepthMicrometres.standardError).toBeGreaterThan(tight.penetrationDepthMicrometres.standardError)
  })

  it('throws without an uncertainty for each depth, and for shares that cannot be meant', () => {
    expect(() => fitWorkingCurveYork({ readings, exposureKind: 'seconds', exposureRelativeUncertainty: 0.02 })).toThrow(expect.objectContaining({ code: 'uncertainty-missing' }))
    for (const exposureRelativeUncertainty of [-0.1, 1, Number.NaN]) {
      expect(() => fitWorkingCurveYork({ ...base, exposureRelativeUncertainty })).toThrow(expect.objectContaining({ code: 'uncertainty-out-of-range' }))
    }
  })
})

describe('fitCensoredWorkingCurve', () => {
  const missing = (exposure: number, state: 'no-film' | 'lost-in-wash' = 'no-film'): FilmReading => ({ exposure, depthMicrometres: Number.NaN, state })

  it('gives exactly the straight line with t and Fieller when no film is missing', () => {
    const line = fittedOnly(fitWorkingCurve({ readings, exposureKind: 'mJ/cm2' }))
    const fit = fittedOnly(fitCensoredWorkingCurve({ readings, exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    const pairs = [
      [fit.penetrationDepthMicrometres.interval, line.penetrationDepthMicrometres.interval],
      [fit.criticalExposure.interval, line.criticalExposure.interval],
      [censoredExposureForDepth(fit, 100).meanInterval, exposureForDepth(line, 100).meanInterval],
    ] as const
    for (const [own, exact] of pairs) {
      if (own.kind !== 'finite' || exact.kind !== 'finite') throw new Error('finite')
      expect(own.lower / exact.lower).toBeCloseTo(1, 8)
      expect(own.upper / exact.upper).toBeCloseTo(1, 8)
    }
    expect(fit.residualStandardDeviation).toBeCloseTo(line.residualStandardDeviation, 8)
  })

  it.each(['no-film', 'lost-in-wash'] as const)('learns from a film that is %s near the critical exposure', state => {
    const without = fittedOnly(fitCensoredWorkingCurve({ readings: readings.slice(3), exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    const withIt = fittedOnly(fitCensoredWorkingCurve({ readings: [missing(7, state), ...readings.slice(3)], exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    expect(withIt.censoredCount).toBe(1)
    if (without.criticalExposure.interval.kind !== 'finite' || withIt.criticalExposure.interval.kind !== 'finite') throw new Error('finite')
    expect(withIt.criticalExposure.interval.lower).toBeGreaterThan(without.criticalExposure.interval.lower)
  })

  it('learns nothing from a film that could not have formed: values and intervals stay', () => {
    const without = fittedOnly(fitCensoredWorkingCurve({ readings, exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    const withIt = fittedOnly(fitCensoredWorkingCurve({ readings: [missing(0.1), ...readings], exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    for (const part of ['penetrationDepthMicrometres', 'criticalExposure'] as const) {
      const [own, other] = [withIt[part].interval, without[part].interval]
      if (own.kind !== 'finite' || other.kind !== 'finite') throw new Error('finite')
      expect(own.lower / other.lower).toBeCloseTo(1, 6)
      expect(own.upper / other.upper).toBeCloseTo(1, 6)
    }
  })

  it('counts a film once: repeated readings that are missing, or one of which was measured', () => {
    const twice: FilmReading[] = [{ ...missing(7), filmId: 'a' }, { ...missing(7), filmId: 'a' }, { ...missing(7), filmId: 'b' }]
    const fit = fittedOnly(fitCensoredWorkingCurve({ readings: [...readings, ...twice], exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    expect(fit.censoredCount).toBe(2)
    const half: FilmReading[] = [{ exposure: 9, depthMicrometres: 36, state: 'measured', filmId: 'c' }, { ...missing(9, 'lost-in-wash'), filmId: 'c' }]
    expect(fittedOnly(fitCensoredWorkingCurve({ readings: [...readings, ...half], exposureKind: 'mJ/cm2', limitMicrometres: 15 })).censoredCount).toBe(0)
  })

  it('takes a film that the gauge puts at zero or below as missing, too thin to measure', () => {
    const said = fittedOnly(fitCensoredWorkingCurve({ readings: [missing(6), ...readings], exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    const read = fittedOnly(fitCensoredWorkingCurve({ readings: [...measured([6], [-2]), ...readings], exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    expect(read.criticalExposure).toEqual(said.criticalExposure)
  })

  it('scales with the exposures: doubled exposures double Ec and leave Dp', () => {
    const all = [missing(7), missing(8), ...readings.slice(1)]
    const fit = fittedOnly(fitCensoredWorkingCurve({ readings: all, exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    const doubled = fittedOnly(fitCensoredWorkingCurve({ readings: all.map(reading => ({ ...reading, exposure: 2 * reading.exposure })), exposureKind: 'mJ/cm2', limitMicrometres: 15 }))
    expect(doubled.criticalExposure.value / fit.criticalExposure.value).toBeCloseTo(2, 8)
    expect(doubled.penetrationDepthMicrometres.value).toBeCloseTo(fit.penetrationDepthMicrometres.value, 6)
  })

  it.each<[string, FilmReading[]]>([
    ['no-films', [missing(7), missing(8), missing(20)]],
    ['too-few-measured', [missing(7), ...readings.slice(0, 2)]],
    ['one-exposure', [missing(7), ...measured([20, 20, 20], [104, 108, 111])]],
  ])('refuses with %s where missing films cannot help', (reason, some) => {
    expect(fitCensoredWorkingCurve({ readings: some, exposureKind: 'seconds', limitMicrometres: 15 })).toMatchObject({ kind: 'refused', reason })
  })

  it.each([-1, Number.NaN, Infinity])('throws for the limit %s', limitMicrometres => {
    expect(() => fitCensoredWorkingCurve({ readings, exposureKind: 'seconds', limitMicrometres })).toThrow(expect.objectContaining({ code: 'limit-out-of-range' }))
  })
})
