import { describe, expect, it } from 'vitest'
import { compareWorkingCurves, fitWorkingCurve, planFilmExposures } from '#shared/film/index.ts'
import { seededRandom } from '#shared/stats/index.ts'
import { fittedOnly, measured } from './readings.ts'

describe('planFilmExposures', () => {
  const plan = (options: Partial<Parameters<typeof planFilmExposures>[0]>) =>
    planFilmExposures({
      expectedExposureAtTarget: 2,
      films: 6,
      stepSeconds: 0.1,
      random: seededRandom(1),
      ...options,
    })
  const sorted = (values: readonly number[]) => [...values].sort((a, b) => a - b)

  it('puts six films at 0.8, 0.8, 1, 1.4, 2.5 and 4 times the expected exposure', () => {
    expect(sorted(plan({}).exposures)).toEqual([1.6, 1.6, 2, 2.8, 5, 8])
  })

  it.each([3, 4, 5, 7, 8, 12])(
    'puts half of %s films at or just below the target and none beyond four times it',
    films => {
      const { exposures } = plan({ films })
      expect(exposures.filter(exposure => exposure <= 2 && exposure >= 1.6)).toHaveLength(
        Math.ceil(films / 2),
      )
      expect(Math.max(...exposures)).toBeLessThanOrEqual(8)
    },
  )

  it('spreads geometrically over a factor of 8 when nothing is known', () => {
    const { exposures, basis, expectedStandardErrorLog } = plan({
      expectedExposureAtTarget: null,
      stepSeconds: 0.001,
    })
    const ordered = sorted(exposures)
    expect(basis).toBe('nothing-known')
    expect(expectedStandardErrorLog).toBeNull()
    expect((ordered[5] ?? 0) / (ordered[0] ?? 1)).toBeCloseTo(8, 1)
    expect((ordered[1] ?? 0) / (ordered[0] ?? 1)).toBeCloseTo((ordered[5] ?? 0) / (ordered[4] ?? 1), 1)
  })

  it('orders by the random source alone, the same seed the same way', () => {
    expect(plan({}).exposures).toEqual(plan({}).exposures)
    const orders = new Set(
      Array.from({ length: 20 }, (_, seed) => plan({ random: seededRandom(seed) }).exposures.join()),
    )
    expect(orders.size).toBeGreaterThan(10)
  })

  it('expects 0.057 for six films from 1.5 to 12 times Ec at 10 µm and Dp 100 µm, 0.135 for thick films only', () => {
    // Design table computed with NumPy: standard error of ln exposure at 75 µm, Ec 10; here for our own six multiples.
    const { expectedStandardErrorLog, expectedFactor } = plan({
      penetrationDepthMicrometres: 100,
      filmSpreadMicrometres: 10,
      stepSeconds: 0.01,
    })
    const x = [0.8, 0.8, 1, 1.4, 2.5, 4].map(Math.log)
    const mean = x.reduce((a, b) => a + b, 0) / 6
    const squares = x.reduce((sum, value) => sum + (value - mean) ** 2, 0)
    const byHand = 0.1 * Math.sqrt(1 / 6 + mean ** 2 / squares)
    expect(expectedStandardErrorLog).toBeCloseTo(byHand, 10)
    // t with 4 degrees of freedom at 0.975, R 4.2.2.
    expect(expectedFactor).toBeCloseTo(Math.exp(2.7764451051977934 * byHand), 9)
  })

  it('says that a step as coarse as the exposures leaves no curve', () => {
    expect(plan({ expectedExposureAtTarget: 0.2, stepSeconds: 5 }).sentence).toContain(
      'all films get one exposure',
    )
    expect(plan({ expectedExposureAtTarget: 1, stepSeconds: 2 }).sentence).toContain(
      'only 2 different exposures',
    )
    expect(plan({}).sentence).toContain('within a factor of 1.')
  })

  it('keeps to the range of the printer', () => {
    const { exposures } = plan({ exposureMin: 1.8, exposureMax: 6 })
    expect(Math.min(...exposures)).toBe(1.8)
    expect(Math.max(...exposures)).toBe(6)
  })

  it.each([
    [8, 'good-enough'],
    [8.1, 'limits-the-answer'],
    [20, 'limits-the-answer'],
    [20.1, 'too-coarse'],
    [null, 'not-stated'],
  ])('judges a caliper of %s µm at Dp 100 µm: %s', (gaugeRepeatabilityMicrometres, kind) => {
    expect(plan({ gaugeRepeatabilityMicrometres, penetrationDepthMicrometres: 100 }).gauge.kind).toBe(kind)
  })

  it.each([
    ['films-out-of-range', { films: 2 }],
    ['films-out-of-range', { films: 101 }],
    ['films-out-of-range', { films: 6.5 }],
    ['exposure-out-of-range', { expectedExposureAtTarget: 0 }],
    ['exposure-out-of-range', { stepSeconds: Number.NaN }],
  ])('throws %s', (code, options) => {
    expect(() => plan(options)).toThrow(expect.objectContaining({ code }))
  })
})

describe('compareWorkingCurves', () => {
  const exposures = [2, 2, 3, 3, 5, 5, 8, 8]
  const curve = (
    factor: number,
    slope: number,
    scatter: number,
    exposureKind: 'seconds' | 'mJ/cm2' = 'seconds',
  ) =>
    fittedOnly(
      fitWorkingCurve({
        readings: measured(
          exposures.map(t => t * factor),
          exposures.map(
            (t, i) => slope * Math.log(t) + 20 + scatter * ([1, -1, -1, 1, 1, -1, -1, 1][i] ?? 0),
          ),
        ),
        exposureKind,
      }),
    )

  it('gives how much longer the second printer must expose, at the target depth', () => {
    const answer = compareWorkingCurves([curve(1, 100, 3), curve(1.3, 100, 3)], {
      depthMicrometres: 120,
      sameWavelength: true,
    })
    expect(answer).toMatchObject({
      kind: 'compared',
      potencyRatio: { value: expect.closeTo(1.3, 9), interval: { kind: 'finite' } },
      extrapolated: false,
    })
    if (
      answer.kind !== 'compared' ||
      answer.pooled.kind !== 'offered' ||
      answer.potencyRatio.interval.kind !== 'finite' ||
      answer.pooled.interval.kind !== 'finite'
    )
      throw new Error('expected both ratios')
    expect(answer.pooled.value).toBeCloseTo(1.3, 9)
    expect(answer.pooled.interval.upper / answer.pooled.interval.lower).toBeLessThan(
      answer.potencyRatio.interval.upper / answer.potencyRatio.interval.lower,
    )
  })

  it('offers one ratio for all depths only with equal slopes shown and one wavelength', () => {
    const pooled = (options: Parameters<typeof compareWorkingCurves>[1], second = curve(1.3, 100, 3)) => {
      const answer = compareWorkingCurves([curve(1, 100, 3), second], options)
      return answer.kind === 'compared' ? answer.pooled : answer
    }
    expect(pooled({ depthMicrometres: 120 })).toMatchObject({ reason: 'wavelengths-differ' })
    expect(pooled({ depthMicrometres: 120, sameWavelength: true }, curve(1.3, 140, 3))).toMatchObject({
      reason: 'slopes-not-shown-equal',
    })
    expect(pooled({ depthMicrometres: 120, sameWavelength: true }, curve(1.3, 70, 1))).toMatchObject({
      reason: 'slopes-not-shown-equal',
    })
    // Not rejecting is not showing: wide scatter, equal slopes.
    expect(pooled({ depthMicrometres: 120, sameWavelength: true }, curve(1.3, 100, 40))).toMatchObject({
      reason: 'slopes-not-shown-equal',
    })
  })

  it('needs less exposure, in both ratios, where the second printer cures 10 µm deeper: exp(-10/Dp)', () => {
    const first = curve(1, 100, 3)
    const deeper = fittedOnly(
      fitWorkingCurve({
        readings: measured(
          exposures,
          first.points.map(point => point.depthMicrometres + 10),
        ),
        exposureKind: 'seconds',
      }),
    )
    const answer = compareWorkingCurves([first, deeper], { depthMicrometres: 120, sameWavelength: true })
    if (answer.kind !== 'compared' || answer.pooled.kind !== 'offered')
      throw new Error('expected both ratios')
    const ratio = Math.exp(-10 / first.penetrationDepthMicrometres.value)
    expect(answer.potencyRatio.value).toBeCloseTo(ratio, 9)
    expect(answer.pooled.value).toBeCloseTo(ratio, 9)
  })

  it('changes with depth where the slopes differ, as the lines do', () => {
    const ratioAt = (depthMicrometres: number) => {
      const answer = compareWorkingCurves([curve(1, 100, 2), curve(1, 125, 2)], { depthMicrometres })
      return answer.kind === 'compared' ? answer.potencyRatio.value : Number.NaN
    }
    // ln E = (depth − 20)/slope on both.
    expect(ratioAt(120)).toBeCloseTo(Math.exp(100 / 125 - 1), 9)
    expect(ratioAt(220)).toBeCloseTo(Math.exp(200 / 125 - 2), 9)
  })

  it('refuses seconds against mJ/cm², and two films alone', () => {
    expect(
      compareWorkingCurves([curve(1, 100, 3), curve(1, 100, 3, 'mJ/cm2')], { depthMicrometres: 100 }),
    ).toMatchObject({ kind: 'refused', reason: 'exposure-kinds-differ' })
    const two = fittedOnly(
      fitWorkingCurve({ readings: measured([2, 4], [50, 120]), exposureKind: 'seconds' }),
    )
    expect(compareWorkingCurves([curve(1, 100, 3), two], { depthMicrometres: 100 })).toMatchObject({
      kind: 'refused',
      reason: 'no-degrees-of-freedom',
    })
  })

  it.each([1, 3])('throws on %s fits', count => {
    expect(() =>
      compareWorkingCurves(new Array<ReturnType<typeof curve>>(count).fill(curve(1, 100, 3)), {
        depthMicrometres: 100,
      }),
    ).toThrow(expect.objectContaining({ code: 'two-fits-needed' }))
  })
})
