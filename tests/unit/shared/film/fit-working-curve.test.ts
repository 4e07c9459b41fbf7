import { describe, expect, it } from 'vitest'
import {
  depthAt,
  exposureForDepth,
  fitWorkingCurve,
  workingCurveWithout,
  type FilmReading,
} from '#shared/film/index.ts'
import { fittedOnly, measured } from './readings.ts'

// Constructed: 100 · ln(E/10) plus 2, -3, 1, 4, -2, -1, 3, -4 µm. Expected values: R 4.2.2, lm(C ~ log(E)).
const exposures = [15, 20, 30, 40, 60, 80, 100, 120]
const depths = [42.55, 66.31, 110.86, 142.63, 177.18, 206.94, 233.26, 244.49]
const readings = Object.freeze(measured(exposures, depths))
const fit = fittedOnly(fitWorkingCurve({ readings, exposureKind: 'mJ/cm2' }))

describe('fitWorkingCurve', () => {
  it('agrees with R on line, covariance, scatter and share explained', () => {
    expect(fit.interceptMicrometres.value).toBeCloseTo(-227.117469103956, 9)
    expect(fit.penetrationDepthMicrometres.value).toBeCloseTo(99.180459220193825, 10)
    expect(fit.covariance[0][0]).toBeCloseTo(35.84715483136112, 10)
    expect(fit.covariance[0][1]).toBeCloseTo(-9.0409680199895348, 10)
    expect(fit.covariance[1][0]).toBe(fit.covariance[0][1])
    expect(fit.covariance[1][1]).toBeCloseTo(2.3588037009439864, 11)
    expect(fit.residualStandardDeviation).toBeCloseTo(3.0911177162547965, 11)
    expect(fit.rSquared).toBeCloseTo(0.99856329890991902, 12)
    expect(fit.degreesOfFreedom).toBe(6)
  })

  it('agrees with R on the intervals of intercept and Dp', () => {
    expect(fit.interceptMicrometres.interval).toMatchObject({
      kind: 'finite',
      lower: expect.closeTo(-241.76774050491522, 8),
      upper: expect.closeTo(-212.46719770299669, 8),
    })
    expect(fit.penetrationDepthMicrometres.interval).toMatchObject({
      kind: 'finite',
      lower: expect.closeTo(95.422394763723403, 9),
      upper: expect.closeTo(102.93852367666425, 9),
    })
  })

  it('gives Ec as the exponential of the crossing, with an interval that is not symmetric', () => {
    expect(fit.criticalExposure.value).toBeCloseTo(9.874, 3)
    expect(fit.criticalExposure.standardError / fit.criticalExposure.value).toBeCloseTo(0.0263, 4)
    const { interval, value } = fit.criticalExposure
    expect(interval.kind).toBe('finite')
    if (interval.kind === 'finite') expect(value - interval.lower).not.toBeCloseTo(interval.upper - value, 3)
  })

  it('agrees with R on residuals, leverages, studentised residuals and Cook distances: first, middle and last', () => {
    const [first, middle, last] = [fit.points[0], fit.points[4], fit.points[7]]
    expect(first?.leverage).toBeCloseTo(0.43733459799671037, 12)
    expect(first?.cooksDistance).toBeCloseTo(0.084596336562444599, 11)
    expect(first?.studentisedResidual).toBeCloseTo(0.43385328816624008, 10)
    expect(middle?.residualMicrometres).toBeCloseTo(-1.781504782935343, 9)
    expect(middle?.cooksDistance).toBeCloseTo(0.031998830715133479, 11)
    expect(middle?.studentisedResidual).toBeCloseTo(-0.58720203198404686, 10)
    expect(last?.leverage).toBeCloseTo(0.3499733316875655, 12)
    expect(last?.cooksDistance).toBeCloseTo(0.44887653912762798, 11)
    expect(last?.studentisedResidual).toBeCloseTo(-1.3872024016945492, 10)
    expect(fit.cooksDistances).toEqual(fit.points.map(point => point.cooksDistance))
  })

  it('agrees with R on stated uncertainties with unequal replicates', () => {
    // R 4.2.2: lm(C ~ log(E), weights = 1 / u^2)
    const uncertainties = [3, 3, 4, 5, 5, 6, 8, 10]
    const stated = fittedOnly(
      fitWorkingCurve({
        readings: measured([2, 2, 2, 3, 5, 5, 8, 12], [40, 46, 43, 88, 130, 141, 190, 228]).map(
          (reading, i) => ({ ...reading, standardUncertaintyMicrometres: uncertainties[i] ?? 1 }),
        ),
        exposureKind: 'seconds',
        weighting: 'stated',
      }),
    )
    expect(stated.interceptMicrometres.value).toBeCloseTo(-28.086590695887764, 10)
    expect(stated.penetrationDepthMicrometres.value).toBeCloseTo(102.69751936853176, 10)
    expect(stated.covariance[0][1]).toBeCloseTo(-9.204880228612728, 10)
    expect(stated.points[4]?.studentisedResidual).toBeCloseTo(-2.4358855316318415, 9)
    expect(stated.points[0]?.cooksDistance).toBeCloseTo(0.54182786364809155, 10)
    expect(stated.points[7]?.cooksDistance).toBeCloseTo(0.0023264520045282447, 11)
  })

  it('agrees with R on proportional weights', () => {
    const outcome = fitWorkingCurve({
      readings: measured([2, 2, 2, 3, 5, 5, 8, 12], [40, 46, 43, 88, 130, 141, 190, 228]),
      exposureKind: 'seconds',
      weighting: 'proportional',
    })
    const proportional = fittedOnly(outcome)
    expect(proportional.penetrationDepthMicrometres.value).toBeCloseTo(103.66108036727418, 10)
    expect(proportional.residualStandardDeviation).toBeCloseTo(0.050834156129300527, 12)
    expect(proportional.findings.map(finding => finding.code)).toContain('weighting-proportional')
  })

  it('takes another confidence level: at 50 % the interval of Dp is 0.7176 standard errors either way', () => {
    // t with 6 degrees of freedom at 0.75, R 4.2.2 qt(0.75, 6).
    const half = fittedOnly(
      fitWorkingCurve({ readings, exposureKind: 'mJ/cm2', confidenceLevel: 0.5 }),
    ).penetrationDepthMicrometres
    expect(half.interval).toMatchObject({
      kind: 'finite',
      upper: expect.closeTo(half.value + 0.71755819649141217 * half.standardError, 9),
    })
  })
})

describe('films, not readings, are what a fit counts', () => {
  const films = [0, 1, 2, 3].flatMap(film =>
    [-3, 1, 2].map(slip => ({
      exposure: 2 ** film,
      depthMicrometres: 50 + 70 * film + ([4, -6, 3, -1][film] ?? 0) + slip,
      state: 'measured' as const,
      filmId: `film ${film}`,
      id: `${film}/${slip}`,
    })),
  )

  it('averages readings of one film: as if each film were read once, at its mean', () => {
    const averaged = fittedOnly(fitWorkingCurve({ readings: films, exposureKind: 'seconds' }))
    const once = fittedOnly(
      fitWorkingCurve({ readings: measured([1, 2, 4, 8], [54, 114, 193, 259]), exposureKind: 'seconds' }),
    )
    expect(averaged.filmCount).toBe(4)
    expect(averaged.degreesOfFreedom).toBe(2)
    expect(averaged.penetrationDepthMicrometres).toEqual(once.penetrationDepthMicrometres)
    expect(averaged.points[1]).toMatchObject({
      readingCount: 3,
      readingIds: ['1/-3', '1/1', '1/2'],
      readingIndexes: [3, 4, 5],
    })
  })

  it('takes unequal numbers of readings, and one name at two exposures for two films', () => {
    const unequal = fittedOnly(fitWorkingCurve({ readings: films.slice(0, 7), exposureKind: 'seconds' }))
    expect(unequal.points.map(point => point.readingCount)).toEqual([3, 3, 1])
    const renamed = films.map(reading => ({ ...reading, filmId: 'the same' }))
    expect(fittedOnly(fitWorkingCurve({ readings: renamed, exposureKind: 'seconds' })).filmCount).toBe(4)
  })

  it('joins stated uncertainties of the readings of a film: √(3² + 4²)/2', () => {
    const stated = films.slice(0, 8).map((reading, i) => ({
      ...reading,
      filmId: `film ${Math.floor(i / 2)}`,
      exposure: 2 ** Math.floor(i / 2),
      depthMicrometres: 50 * (1 + Math.floor(i / 2)) + i,
      standardUncertaintyMicrometres: i % 2 === 0 ? 3 : 4,
    }))
    const weighted = fittedOnly(
      fitWorkingCurve({ readings: stated, exposureKind: 'seconds', weighting: 'stated' }),
    )
    expect(weighted.points[0]?.weight).toBeCloseTo(1 / 6.25, 12)
  })
})

describe('what does not enter', () => {
  const others: FilmReading[] = [
    { exposure: 5, depthMicrometres: 0, state: 'no-film' },
    { exposure: 6, depthMicrometres: 12, state: 'lost-in-wash' },
    { exposure: 7, depthMicrometres: 900, state: 'excluded' },
    { exposure: 8, depthMicrometres: 0, state: 'measured' },
    { exposure: 9, depthMicrometres: -4, state: 'measured' },
  ]

  it.each([
    ['first', [...others, ...readings]],
    ['last', [...readings, ...others]],
  ] as const)('leaves the fit as it is, standing %s, and is listed by position', (place, all) => {
    const offset = place === 'first' ? 0 : readings.length
    const mixed = fittedOnly(fitWorkingCurve({ readings: all, exposureKind: 'mJ/cm2' }))
    expect(mixed.penetrationDepthMicrometres).toEqual(fit.penetrationDepthMicrometres)
    expect(mixed.censoredIndexes).toEqual([offset, offset + 1])
    expect(mixed.excludedIndexes).toEqual([offset + 2])
    expect(mixed.notAboveZeroIndexes).toEqual([offset + 3, offset + 4])
    expect(mixed.findings.find(finding => finding.code === 'not-above-zero')?.sentence).toContain(
      '2 readings are zero or below',
    )
    expect(mixed.findings.find(finding => finding.code === 'censored-left-out')?.sentence).toContain(
      '2 films did not form or were lost',
    )
  })

  it('is the same fit as without the readings', () => {
    const without = fittedOnly(workingCurveWithout({ readings, exposureKind: 'mJ/cm2' }, [0, 7]))
    const shorter = fittedOnly(fitWorkingCurve({ readings: readings.slice(1, 7), exposureKind: 'mJ/cm2' }))
    expect(without.penetrationDepthMicrometres).toEqual(shorter.penetrationDepthMicrometres)
    expect(without.excludedIndexes).toEqual([0, 7])
  })
})

describe('too little to tell', () => {
  it.each([
    ['no-films', []],
    ['no-films', [{ exposure: 2, depthMicrometres: 0, state: 'no-film' }]],
    ['no-films', measured([2, 3], [0, -1])],
    ['one-film', measured([2], [80])],
    ['one-exposure', measured([2, 2, 2], [80, 90, 85])],
    ['one-exposure', measured([2, 2 + 4e-16], [80, 90])],
    ['slope-not-positive', measured([1, 2, 4], [90, 70, 40])],
    ['slope-not-positive', measured([1, 2, 4], [80, 80, 80])],
    ['slope-not-positive', measured([1, 2], [80, 80 + 1e-12])],
    ['slope-not-positive', measured([1, 2], [80, 80.05])],
  ] as const)('refuses %s', (reason, few) => {
    const outcome = fitWorkingCurve({ readings: few, exposureKind: 'seconds' })
    expect(outcome).toMatchObject({ kind: 'refused', reason })
    if (outcome.kind === 'refused') expect(outcome.detail).toMatch(/\.$/)
  })

  it('refuses stated weights when one film states nothing', () => {
    const half = readings.map((reading, i) =>
      i === 3 ? reading : { ...reading, standardUncertaintyMicrometres: 2 },
    )
    expect(fitWorkingCurve({ readings: half, exposureKind: 'seconds', weighting: 'stated' })).toMatchObject({
      kind: 'refused',
      reason: 'uncertainty-missing',
    })
  })

  it('two films give a point, no interval, and a finding that says so', () => {
    const two = fittedOnly(
      fitWorkingCurve({ readings: measured([2, 4], [50, 119.3147180559945]), exposureKind: 'seconds' }),
    )
    expect(two.penetrationDepthMicrometres.value).toBeCloseTo(100, 10)
    expect(two.penetrationDepthMicrometres.interval).toEqual({ kind: 'unbounded' })
    expect(two.criticalExposure.interval).toEqual({ kind: 'unbounded' })
    expect(exposureForDepth(two, 80)).toMatchObject({
      meanInterval: { kind: 'unbounded' },
      singleInterval: { kind: 'unbounded' },
    })
    expect(depthAt(two, 3)).toMatchObject({
      confidenceInterval: { kind: 'unbounded' },
      predictionInterval: { kind: 'unbounded' },
    })
    expect(two.findings[0]).toMatchObject({ code: 'few-films', severity: 'serious' })
  })

  it('three films that scatter have a slope that is not established: Fieller has no two ends', () => {
    const noisy = fittedOnly(
      fitWorkingCurve({ readings: measured([10, 11, 12], [90, 60, 110]), exposureKind: 'seconds' }),
    )
    expect(noisy.criticalExposure.interval.kind).not.toBe('finite')
    expect(exposureForDepth(noisy, 80).meanInterval.kind).not.toBe('finite')
    expect(noisy.findings[0]).toMatchObject({ code: 'slope-not-established', severity: 'serious' })
  })

  it('still fits films whose critical exposure is a number, however small', () => {
    expect(
      fittedOnly(fitWorkingCurve({ readings: measured([1, 2], [80, 80.1]), exposureKind: 'seconds' }))
        .criticalExposure.value,
    ).toBeGreaterThan(0)
  })

  it('keeps every number finite for films that hardly differ', () => {
    const flat = fitWorkingCurve({
      readings: measured([10, 11, 12, 13], [90, 90.2, 89.9, 90.4]),
      exposureKind: 'seconds',
    })
    if (flat.kind === 'fitted') {
      expect(Number.isFinite(flat.criticalExposure.value)).toBe(true)
      expect(Number.isFinite(exposureForDepth(flat, 5000).value)).toBe(true)
    }
  })
})

describe("the caller's mistakes", () => {
  it.each([0, -1, Number.NaN, Infinity])('throws on the exposure %s, whatever the state', exposure => {
    for (const state of ['measured', 'no-film', 'excluded'] as const) {
      expect(() =>
        fitWorkingCurve({
          readings: [...readings, { exposure, depthMicrometres: 50, state }],
          exposureKind: 'seconds',
        }),
      ).toThrow(
        expect.objectContaining({
          code: 'exposure-out-of-range',
          message: expect.stringContaining('reading 9'),
        }),
      )
    }
  })

  it('throws on a depth that is no number, unless the reading does not enter', () => {
    const broken = { exposure: 5, depthMicrometres: Number.NaN }
    expect(() =>
      fitWorkingCurve({ readings: [{ ...broken, state: 'measured' }], exposureKind: 'seconds' }),
    ).toThrow(expect.objectContaining({ code: 'depth-out-of-range' }))
    expect(
      fitWorkingCurve({ readings: [...readings, { ...broken, state: 'no-film' }], exposureKind: 'seconds' })
        .kind,
    ).toBe('fitted')
  })

  it.each([0, -2, Number.NaN])('throws on the stated uncertainty %s', standardUncertaintyMicrometres => {
    const bad = readings.map(reading => ({ ...reading, standardUncertaintyMicrometres }))
    expect(() => fitWorkingCurve({ readings: bad, exposureKind: 'seconds' })).toThrow(
      expect.objectContaining({ code: 'uncertainty-out-of-range' }),
    )
  })

  it.each([0, 1, 1.5, Number.NaN])('throws on the confidence level %s', confidenceLevel => {
    expect(() => fitWorkingCurve({ readings, exposureKind: 'seconds', confidenceLevel })).toThrow(
      expect.objectContaining({ code: 'level-out-of-range' }),
    )
  })
})

it('fits 10,000 readings to the digits of the line they were made from', () => {
  const many = Array.from({ length: 10_000 }, (_, i) => ({
    exposure: 2 + (i % 97) / 10,
    depthMicrometres: 120 * Math.log((2 + (i % 97) / 10) / 1.1) + ((i % 3) - 1) * 5,
    state: 'measured' as const,
  }))
  const large = fittedOnly(fitWorkingCurve({ readings: many, exposureKind: 'seconds' }))
  expect(large.filmCount).toBe(10_000)
  expect(large.levelCount).toBe(97)
  expect(large.penetrationDepthMicrometres.value).toBeCloseTo(120, 1)
})
