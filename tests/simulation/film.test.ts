import { describe, expect, it } from 'vitest'
import { seededRandom } from '#shared/stats/index.ts'
import {
  falseAlarms,
  filmCoverage,
  filmDesigns,
  filmQuantities,
  planCoverage,
  planDesigns,
  repeatedReadingCoverage,
} from './film-coverage.ts'
import { potencyCoverage, transferCases, transferCoverage } from './film-transfer.ts'

/** Short form of `npm run simulate`: 1500 sets give a Monte Carlo error of 0.56 points; limits leave four of them. */
const sets = 1500

describe('coverage of the film intervals with additive scatter', () => {
  const bands = filmDesigns.map((design, i) => ({
    name: `${design.levels} exposures of ${design.replicates}`,
    result: filmCoverage({
      design,
      scatter: { kind: 'additive', micrometres: 20 },
      sets,
      random: seededRandom(100 + i),
    }),
  }))

  it.each(filmQuantities)('holds 95 % of the truths for %s in each of twelve designs', quantity => {
    for (const { result } of bands) {
      expect(Math.abs(result[quantity].coverage - 0.95)).toBeLessThan(0.0225)
      expect(result[quantity].sets).toBeGreaterThan(0.99 * sets)
    }
  })

  it.each(filmQuantities)('holds 94.5 to 95.5 % on the mean of the designs for %s', quantity => {
    const mean = bands.reduce((sum, { result }) => sum + result[quantity].coverage, 0) / bands.length
    expect(Math.abs(mean - 0.95)).toBeLessThan(0.0075)
  })

  it('is as narrow as six films allow: Dp within 38 %, the exposure for 200 µm within 32 %', () => {
    const six = bands.find(({ name }) => name === '6 exposures of 1')
    expect(six?.result.Dp.medianRelativeWidth).toBeLessThan(0.41)
    expect(six?.result['E(200 µm)'].medianRelativeWidth).toBeLessThan(0.34)
  })
})

describe('coverage of the film intervals with scatter in proportion to depth', () => {
  it('stays above 92 % with equal weights, and near 95 % with proportional ones', () => {
    for (const [i, design] of filmDesigns.entries()) {
      const scatter = { kind: 'proportional', share: 0.05 } as const
      const equal = filmCoverage({ design, scatter, sets, random: seededRandom(200 + i) })
      const proportional = filmCoverage({
        design,
        scatter,
        weighting: 'proportional',
        sets,
        random: seededRandom(300 + i),
      })
      for (const quantity of ['Dp', 'Ec', 'E(100 µm)', 'E(200 µm)'] as const) {
        expect(equal[quantity].coverage).toBeGreaterThan(0.92)
        expect(Math.abs(proportional[quantity].coverage - 0.95)).toBeLessThan(0.0275)
      }
    }
  })

  it('shows why proportional weights are not the default: below 80 % where scatter is additive', () => {
    const design = { levels: 6, replicates: 2 }
    const wrong = filmCoverage({
      design,
      scatter: { kind: 'additive', micrometres: 20 },
      weighting: 'proportional',
      sets,
      random: seededRandom(9),
    })
    expect(wrong['E(100 µm)'].coverage).toBeLessThan(0.8)
  })
})

it('needs readings of one film averaged: 95 % then, below 85 % when they pose as films', () => {
  expect(
    Math.abs(repeatedReadingCoverage({ averaged: true, sets, random: seededRandom(4) }).Dp.coverage - 0.95),
  ).toBeLessThan(0.0225)
  expect(
    repeatedReadingCoverage({ averaged: false, sets, random: seededRandom(4) }).Dp.coverage,
  ).toBeLessThan(0.85)
})

it('calls faultless films seriously faulty in at most 6 % of sets', () => {
  for (const design of [
    { levels: 4, replicates: 1 },
    { levels: 6, replicates: 1 },
    { levels: 8, replicates: 3 },
  ]) {
    const alarms = falseAlarms({
      design,
      scatter: { kind: 'additive', micrometres: 20 },
      sets,
      random: seededRandom(5),
    })
    expect(alarms.get('any serious') ?? 0).toBeLessThan(0.06)
  }
})

it('plans films that beat every plain series for the target, and stay honest on a bent curve', () => {
  const [plan, ...others] = planDesigns.map(([, exposures]) =>
    planCoverage({ exposures, sets, random: seededRandom(6) }),
  )
  expect(plan).toBeDefined()
  if (plan === undefined) return
  for (const other of others)
    expect(plan.target.medianRelativeWidth).toBeLessThan(other.target.medianRelativeWidth)
  expect(plan.bentTarget.coverage).toBeGreaterThan(0.92)
  expect(plan.bentSlope.coverage).toBeGreaterThan(0.88)
})

describe('carrying an exposure', () => {
  it.each(
    transferCases.map(
      which =>
        [
          `${which.penetrationDepthMicrometres} µm, ${which.layerHeightMicrometres} µm layer, ${which.films} films, ${which.rule}`,
          which,
        ] as const,
    ),
  )('to another layer height holds 93 to 99 %% of the truths: %s', (_, which) => {
    const { coverage } = transferCoverage({ case: which, sets, random: seededRandom(7) })
    expect(coverage).toBeGreaterThan(0.93)
    expect(coverage).toBeLessThan(0.99)
  })

  it('to double the height at Dp 50 µm says that a print must decide, always', () => {
    const which = transferCases.find(({ penetrationDepthMicrometres }) => penetrationDepthMicrometres === 50)
    expect(which).toBeDefined()
    if (which !== undefined)
      expect(transferCoverage({ case: which, sets: 200, random: seededRandom(8) }).printMustDecide).toBe(1)
  })

  it.each([1, 1.1, 1.2, 1.4])(
    'to another printer holds at least 94 %% where Dp differs by a factor of %s',
    slopeRatio => {
      const { separate } = potencyCoverage({
        scatter: { kind: 'additive', micrometres: 20 },
        slopeRatio,
        sets,
        random: seededRandom(10),
      })
      expect(separate.coverage).toBeGreaterThan(0.94)
    },
  )
})
