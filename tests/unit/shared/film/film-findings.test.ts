import { describe, expect, it } from 'vitest'
import {
  fitWorkingCurve,
  implausibleReadings,
  workingCurveWithout,
  type FilmReading,
} from '#shared/film/index.ts'
import { fittedOnly, measured } from './readings.ts'

const fitOf = (readings: readonly FilmReading[]) =>
  fittedOnly(fitWorkingCurve({ readings, exposureKind: 'seconds' }))
const finding = (readings: readonly FilmReading[], code: string) =>
  fitOf(readings).findings.find(entry => entry.code === code)

/** Films on depth = 100 · ln(t / 1 s) with a fixed small scatter. */
const scatter = [2, -3, 1, 3, -2, -1, 3, -3]
const line = (exposures: readonly number[], extra: (exposure: number, i: number) => number = () => 0) =>
  measured(
    exposures,
    exposures.map((t, i) => 100 * Math.log(t) + (scatter[i % 8] ?? 0) + extra(t, i)),
  )
const eight = [1.5, 2, 3, 4, 6, 8, 10, 12]

describe('findings', () => {
  it('has nothing serious to say of eight films on a line', () => {
    expect(fitOf(line(eight)).findings.filter(({ severity }) => severity !== 'info')).toEqual([])
  })

  it('has nothing to judge where films lie on a line to the last digits', () => {
    const exact = fitOf(
      measured(
        eight,
        eight.map(t => 100 * Math.log(t)),
      ),
    )
    expect(exact.residualStandardDeviation).toBe(0)
    expect(exact.checks).toEqual({ curvature: null, lackOfFit: null })
    expect(exact.findings.map(({ code }) => code)).toEqual(['no-replicates'])
  })

  it('names a bend that flattens: from which exposure on, and what it does to the thinnest film', () => {
    const bend = finding(
      line(eight, t => -40 * Math.max(0, Math.log(t / 4))),
      'curvature',
    )
    expect(bend).toMatchObject({
      severity: 'serious',
      formula: expect.any(String),
      source: expect.any(String),
    })
    expect(bend?.sentence).toMatch(/bends: above [\d.]+ s it flattens\. .* comes out about \d+ % too low/)
    expect(bend?.numbers.pValue).toBeLessThan(0.01)
  })

  it('names a bend that steepens', () => {
    expect(
      finding(
        line(eight, t => 40 * Math.max(0, Math.log(t / 4))),
        'curvature',
      )?.sentence,
    ).toMatch(/it steepens\. .* too high/)
  })

  it('carries the curvature test even where it is silent, as R has it', () => {
    // R 4.2.2: x <- log(E) - mean(log(E)); lm(C ~ x + I(x^2)); the raw powers lose three digits.
    const fit = fitOf(
      measured(
        [15, 20, 30, 40, 60, 80, 100, 120],
        [42.55, 66.31, 110.86, 142.63, 177.18, 206.94, 233.26, 244.49],
      ),
    )
    expect(fit.checks.curvature?.coefficient).toBeCloseTo(-1.6240807506982098, 9)
    expect(fit.checks.curvature?.standardError).toBeCloseTo(2.9095487022704045, 9)
    expect(fit.checks.curvature?.t).toBeCloseTo(-0.55818991771160009, 10)
    expect(fit.checks.curvature?.pValue).toBeCloseTo(0.60078480146131641, 10)
  })

  it('finds lack of fit against replicates, and says when replicates are too alike to judge', () => {
    const twice = [2, 2, 4, 4, 8, 8, 12, 12]
    const steps = [0, 0, 30, 30, -30, -30, 10, 10]
    expect(
      finding(
        line(twice, (_, i) => steps[i] ?? 0),
        'lack-of-fit',
      ),
    ).toMatchObject({ severity: 'serious' })
    const alike = measured(
      twice,
      twice.map((t, i) => Math.round(100 * Math.log(t)) + (steps[i] ?? 0)),
    )
    expect(finding(alike, 'lack-of-fit')).toBeUndefined()
    expect(finding(alike, 'replicates-identical')?.sentence).toContain('exactly alike')
  })

  it.each([0, 3, 7])(
    'names the odd film at place %s, keeps it, and says what the curve would be without it',
    odd => {
      const readings = line(eight, (_, i) => (i === odd ? 60 : 0))
      const outlier = finding(readings, 'outlier')
      expect(outlier).toMatchObject({ severity: 'serious', readingIndexes: [odd] })
      expect(fitOf(readings).filmCount).toBe(8)
      const without = fittedOnly(
        workingCurveWithout({ readings, exposureKind: 'seconds' }, outlier?.readingIndexes ?? []),
      )
      expect(outlier?.numbers.withoutPenetrationDepthMicrometres).toBeCloseTo(
        without.penetrationDepthMicrometres.value,
        8,
      )
      expect(outlier?.numbers.withoutCriticalExposure).toBeCloseTo(without.criticalExposure.value, 9)
      expect(outlier?.sentence).toContain(
        `${Math.round(without.penetrationDepthMicrometres.value)} µm instead of`,
      )
    },
  )

  it('accuses one of five films, never one of four', () => {
    const nearly = (exposures: readonly number[]) =>
      measured(
        exposures,
        exposures.map((t, i) => 100 * Math.log(t) + (i === 1 ? 60 : (scatter[i] ?? 0) / 1000)),
      )
    expect(finding(nearly([1.5, 3, 6, 12]), 'outlier')).toBeUndefined()
    expect(finding(nearly([1.5, 3, 6, 9, 12]), 'outlier')).toMatchObject({ readingIndexes: [1] })
  })

  it('names the one film that decides the line', () => {
    const lone = finding(measured([2, 2.1, 2.2, 2.3, 12], [70, 75, 78, 86, 200]), 'influence')
    expect(lone).toMatchObject({ severity: 'caution', readingIndexes: [4] })
  })

  it('sees scatter that grows with depth', () => {
    const twice = eight.flatMap(t => [t, t, t])
    const sides = [1, -1, 0.2]
    expect(
      finding(
        line(twice, (t, i) => (sides[i % 3] ?? 0) * 0.15 * 100 * Math.log(t)),
        'spread-grows',
      ),
    ).toMatchObject({ severity: 'caution' })
    expect(
      finding(
        line(twice, (_, i) => (sides[i % 3] ?? 0) * 15),
        'spread-grows',
      ),
    ).toBeUndefined()
  })

  it.each([
    ['few-levels', [2, 2, 4, 4, 8, 8], true],
    ['few-levels', [2, 4, 6, 8], false],
    ['no-replicates', [2, 4, 6, 8], true],
    ['no-replicates', [2, 4, 6, 8, 8], false],
    ['few-films', [2, 4, 6, 8], true],
    ['few-films', [2, 4, 6, 8, 10], false],
    ['only-thick-films', [4, 5, 6, 8, 10], true],
    ['only-thick-films', [3, 5, 6, 8, 10], false],
  ])('%s for %j: %s', (code, exposures, spoken) => {
    expect(finding(line(exposures), code) !== undefined).toBe(spoken)
  })

  it('sets the serious ones first', () => {
    const order = fitOf(line(eight, (_, i) => (i === 0 ? 60 : 0))).findings.map(({ severity }) => severity)
    expect(order[0]).toBe('serious')
    expect(order.at(-1)).toBe('info')
  })

  it('writes whole sentences without numbers that are none', () => {
    const all = [
      line(eight, t => -40 * Math.max(0, Math.log(t / 4))),
      line([2, 4]),
      line([2, 3, 4]),
      line(eight, (_, i) => (i === 7 ? 60 : 0)),
    ]
    for (const { sentence, numbers } of all.flatMap(readings => fitOf(readings).findings)) {
      expect(sentence).toMatch(/^[A-Z\d].*\.$/)
      expect(sentence).not.toMatch(/NaN|Infinity|undefined/)
      for (const value of Object.values(numbers)) expect(value).not.toBeNaN()
    }
  })
})

describe('implausibleReadings', () => {
  const film = (depthMicrometres: number, exposure = 2): FilmReading => ({
    exposure,
    depthMicrometres,
    state: 'measured',
  })

  it.each([
    [2000, false],
    [2000.1, true],
    [85_000, true],
    [5, false],
    [4.9, true],
    [0, true],
    [-3, true],
  ])('marks a lone film of %s µm: %s', (depth, marked) => {
    expect(implausibleReadings([film(depth)])).toHaveLength(marked ? 1 : 0)
  })

  it.each([0, 4, 7])('marks the slip at place %s of eight and no other', place => {
    const readings = line(eight, (_, i) => (i === place ? 400 : 0))
    expect(implausibleReadings(readings).map(({ index }) => index)).toEqual([place])
  })

  it('marks a decimal that slipped while the rest stay unmarked, three slips of twelve too', () => {
    const twelve = [...eight, 2.5, 3.5, 5, 7]
    const slipped = line(twelve).map((reading, i) =>
      [1, 5, 9].includes(i) ? { ...reading, depthMicrometres: reading.depthMicrometres * 10 } : reading,
    )
    expect(implausibleReadings(slipped).map(({ index }) => index)).toEqual([1, 5, 9])
  })

  it('leaves states other than measured alone', () => {
    expect(
      implausibleReadings([
        { exposure: 2, depthMicrometres: 0, state: 'no-film' },
        { exposure: 2, depthMicrometres: 1e6, state: 'excluded' },
      ]),
    ).toEqual([])
  })
})
