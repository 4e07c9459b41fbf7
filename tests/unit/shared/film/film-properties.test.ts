import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  compareWorkingCurves,
  exposureForDepth,
  fitWorkingCurve,
  planFilmExposures,
  type FilmReading,
  type WorkingCurveFit,
} from '#shared/film/index.ts'
import { seededRandom } from '#shared/stats/index.ts'

/** Films that make a curve: 3 to 12 different exposures, depths that rise with some scatter. */
const filmsArbitrary = fc
  .record({
    exposures: fc.uniqueArray(fc.integer({ min: 10, max: 400 }), { minLength: 3, maxLength: 12 }),
    slope: fc.double({ min: 40, max: 300, noNaN: true }),
    scatter: fc.array(fc.double({ min: -8, max: 8, noNaN: true }), { minLength: 12, maxLength: 12 }),
  })
  .map(({ exposures, slope, scatter }): FilmReading[] =>
    exposures.map((exposure, i) => ({
      exposure: exposure / 10,
      depthMicrometres: 20 + slope * Math.log(exposure / 9) + (scatter[i] ?? 0),
      state: 'measured',
    })),
  )
  .filter(readings => readings.every(reading => reading.depthMicrometres > 0))

function fitOf(readings: readonly FilmReading[]): WorkingCurveFit {
  const outcome = fitWorkingCurve({ readings, exposureKind: 'seconds' })
  fc.pre(outcome.kind === 'fitted')
  if (outcome.kind !== 'fitted') throw new Error('unreachable')
  // Films exactly on a line leave rounding for scatter; they have tests of their own.
  fc.pre(outcome.residualStandardDeviation > 0.01)
  return outcome
}

function near(actual: number, expected: number): void {
  expect(Math.abs(actual - expected)).toBeLessThanOrEqual(1e-9 * Math.max(1e-3, Math.abs(expected)))
}

function nearInterval(
  actual: WorkingCurveFit['criticalExposure']['interval'],
  expected: WorkingCurveFit['criticalExposure']['interval'],
  factor: number,
): void {
  // Where a discriminant is zero to the last digit, rounding decides the kind.
  fc.pre(actual.kind === expected.kind)
  if (actual.kind === 'finite' && expected.kind === 'finite') {
    expect(Math.abs(actual.lower / (expected.lower * factor) - 1)).toBeLessThan(1e-6)
    expect(Math.abs(actual.upper / (expected.upper * factor) - 1)).toBeLessThan(1e-6)
  }
}

describe('the working curve', () => {
  it.each([2, 0.1, 1e-6, 1e6])(
    'with exposures times %s has Ec times that, and the same Dp and findings',
    factor => {
      fc.assert(
        fc.property(filmsArbitrary, readings => {
          const plain = fitOf(readings)
          const scaled = fitOf(readings.map(reading => ({ ...reading, exposure: reading.exposure * factor })))
          near(scaled.penetrationDepthMicrometres.value, plain.penetrationDepthMicrometres.value)
          expect(
            Math.abs(scaled.criticalExposure.value / plain.criticalExposure.value / factor - 1),
          ).toBeLessThan(1e-6)
          nearInterval(scaled.criticalExposure.interval, plain.criticalExposure.interval, factor)
          nearInterval(
            exposureForDepth(scaled, 100).meanInterval,
            exposureForDepth(plain, 100).meanInterval,
            factor,
          )
          expect(scaled.findings.map(({ code }) => code)).toEqual(plain.findings.map(({ code }) => code))
        }),
      )
    },
  )

  it('with depths times 25.4 has Dp and scatter times that, and the same Ec', () => {
    fc.assert(
      fc.property(filmsArbitrary, readings => {
        const plain = fitOf(readings)
        const scaled = fitOf(
          readings.map(reading => ({ ...reading, depthMicrometres: reading.depthMicrometres * 25.4 })),
        )
        near(scaled.penetrationDepthMicrometres.value, 25.4 * plain.penetrationDepthMicrometres.value)
        near(scaled.residualStandardDeviation, 25.4 * plain.residualStandardDeviation)
        nearInterval(scaled.criticalExposure.interval, plain.criticalExposure.interval, 1)
        expect(scaled.rSquared).toBeCloseTo(plain.rSquared, 9)
      }),
    )
  })

  it('with a gauge that reads 10 µm too much has the same Dp, and Ec times exp(-10/Dp)', () => {
    fc.assert(
      fc.property(filmsArbitrary, readings => {
        const plain = fitOf(readings)
        const shifted = fitOf(
          readings.map(reading => ({ ...reading, depthMicrometres: reading.depthMicrometres + 10 })),
        )
        const dp = plain.penetrationDepthMicrometres.value
        near(shifted.penetrationDepthMicrometres.value, dp)
        expect(
          Math.abs(shifted.criticalExposure.value / (plain.criticalExposure.value * Math.exp(-10 / dp)) - 1),
        ).toBeLessThan(1e-6)
      }),
    )
  })

  it('does not care for the order of rows', () => {
    fc.assert(
      fc.property(filmsArbitrary, fc.integer(), (readings, seed) => {
        const random = seededRandom(seed)
        const plain = fitOf(readings)
        const mixed = fitOf(
          readings
            .map(reading => ({ reading, at: random() }))
            .sort((a, b) => a.at - b.at)
            .map(({ reading }) => reading),
        )
        near(mixed.penetrationDepthMicrometres.value, plain.penetrationDepthMicrometres.value)
        near(mixed.residualStandardDeviation, plain.residualStandardDeviation)
        nearInterval(mixed.criticalExposure.interval, plain.criticalExposure.interval, 1)
      }),
    )
  })

  it('with every film twice has the same line, and half of the residual variance of the mean', () => {
    fc.assert(
      fc.property(filmsArbitrary, readings => {
        const plain = fitOf(readings)
        const twice = fitOf([...readings, ...readings])
        near(twice.penetrationDepthMicrometres.value, plain.penetrationDepthMicrometres.value)
        near(twice.centre.sumWeights, 2 * plain.centre.sumWeights)
        expect(twice.levelCount).toBe(plain.levelCount)
      }),
    )
  })

  it('holds its own value inside every finite interval, and more confidence never narrows it', () => {
    fc.assert(
      fc.property(filmsArbitrary, fc.double({ min: 1, max: 400, noNaN: true }), (readings, depth) => {
        const { value, meanInterval, singleInterval } = exposureForDepth(fitOf(readings), depth)
        for (const interval of [meanInterval, singleInterval]) {
          if (interval.kind !== 'finite') continue
          expect(interval.lower).toBeLessThanOrEqual(value * (1 + 1e-12))
          expect(interval.upper).toBeGreaterThanOrEqual(value * (1 - 1e-12))
        }
        const surer = fitWorkingCurve({ readings, exposureKind: 'seconds', confidenceLevel: 0.99 })
        if (surer.kind !== 'fitted' || meanInterval.kind !== 'finite') return
        const wide = exposureForDepth(surer, depth).meanInterval
        if (wide.kind === 'finite')
          expect(wide.upper / wide.lower).toBeGreaterThanOrEqual(
            (meanInterval.upper / meanInterval.lower) * (1 - 1e-9),
          )
      }),
    )
  })

  it('leaves its input alone and gives the same digits again', () => {
    fc.assert(
      fc.property(filmsArbitrary, readings => {
        const frozen = Object.freeze(readings.map(reading => Object.freeze(reading)))
        expect(fitWorkingCurve({ readings: frozen, exposureKind: 'seconds' })).toEqual(
          fitWorkingCurve({ readings: frozen, exposureKind: 'seconds' }),
        )
      }),
    )
  })
})

describe('compareWorkingCurves', () => {
  it('turns the ratio over when the printers change places', () => {
    fc.assert(
      fc.property(filmsArbitrary, filmsArbitrary, (a, b) => {
        const there = compareWorkingCurves([fitOf(a), fitOf(b)], { depthMicrometres: 120 })
        const back = compareWorkingCurves([fitOf(b), fitOf(a)], { depthMicrometres: 120 })
        if (there.kind !== 'compared' || back.kind !== 'compared') return
        expect(there.potencyRatio.value * back.potencyRatio.value).toBeCloseTo(1, 9)
        const [up, down] = [there.potencyRatio.interval, back.potencyRatio.interval]
        if (up.kind === 'finite' && down.kind === 'finite') expect(up.lower * down.upper).toBeCloseTo(1, 6)
      }),
    )
  })

  it('finds the factor by which all exposures of the second printer are longer', () => {
    fc.assert(
      fc.property(filmsArbitrary, fc.double({ min: 0.2, max: 5, noNaN: true }), (readings, factor) => {
        const answer = compareWorkingCurves(
          [
            fitOf(readings),
            fitOf(readings.map(reading => ({ ...reading, exposure: reading.exposure * factor }))),
          ],
          { depthMicrometres: 90 },
        )
        if (answer.kind !== 'compared') return
        expect(Math.abs(answer.potencyRatio.value / factor - 1)).toBeLessThan(1e-9)
        expect(answer.slopeRatio.value).toBeCloseTo(1, 9)
        expect(answer.parallelism.pValue).toBeCloseTo(1, 6)
      }),
    )
  })
})

describe('planFilmExposures', () => {
  it('keeps every exposure on the step and the number of films, for any printer', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.05, max: 500, noNaN: true }),
        fc.integer({ min: 3, max: 100 }),
        fc.constantFrom(0.01, 0.05, 0.1, 0.25, 1),
        fc.integer(),
        (expected, films, stepSeconds, seed) => {
          const plan = planFilmExposures({
            expectedExposureAtTarget: expected,
            films,
            stepSeconds,
            random: seededRandom(seed),
          })
          expect(plan.exposures).toHaveLength(films)
          for (const exposure of plan.exposures) {
            expect(exposure).toBeGreaterThan(0)
            expect(Math.abs(exposure / stepSeconds - Math.round(exposure / stepSeconds))).toBeLessThan(1e-6)
          }
        },
      ),
    )
  })
})
