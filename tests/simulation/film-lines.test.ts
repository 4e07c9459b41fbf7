import { describe, expect, it } from 'vitest'
import { seededRandom } from '#shared/stats/index.ts'
import { bentCoverage, lineDesigns, robustCoverage, yorkCoverage } from './film-lines-coverage.ts'

/** Short form of `npm run simulate film-lines`: 800 sets give a Monte Carlo error of 0.8 points; limits leave about four of them. */
const sets = 800
const designs = lineDesigns.map((design, i) => ({ ...design, seed: 60 + i }))

describe('York\'s line', () => {
  it.each(designs)('holds at least 92 %% of the truths, uncertainties stated right or half: $levels exposures of $replicates', ({ seed, ...design }) => {
    for (const stated of [1, 0.5]) {
      const { Dp, Ec, refusals } = yorkCoverage({ design, stated, scale: 0, sets, random: seededRandom(seed) })
      for (const { coverage } of [Dp, Ec]) expect(coverage).toBeGreaterThan(0.92)
      expect(refusals).toBe(0)
    }
  })
  it('needs the meter\'s scale error told to hold Ec, and not to hold Dp', () => {
    const design = { levels: 8, replicates: 1 }
    const told = yorkCoverage({ design, stated: 1, scale: 0.1, sets, random: seededRandom(70) })
    expect(told.Ec.coverage).toBeGreaterThan(0.92)
    expect(told.Dp.coverage).toBeGreaterThan(0.92)
  })
})

describe('robust line', () => {
  it.each(designs)('holds 92 to 98 %% of the truths with and without wild films: $levels exposures of $replicates', ({ seed, ...design }) => {
    for (const wild of [0, 0.1]) {
      const { Dp, Ec } = robustCoverage({ design, wild, sets, random: seededRandom(seed) })
      for (const { coverage } of [Dp, Ec]) expect(Math.abs(coverage - 0.95)).toBeLessThan(0.032)
    }
  })
  it('is named as different from the straight line in at most 1 % of faultless sets', () => {
    for (const design of lineDesigns) expect(robustCoverage({ design, wild: 0, sets, random: seededRandom(80) }).differing).toBeLessThan(0.01)
  })
})

describe('exposure for 100 µm by the curves that bend', () => {
  // The two-line curve is the more nonlinear one: its band is a linear approximation and holds 92 to 95 %.
  it.each([['quadratic', 0.915], ['two-line', 0.88]] as const)('%s', (model, least) => {
    for (const design of lineDesigns) expect(bentCoverage({ design, model, sets: 200, random: seededRandom(90) }).answer.coverage).toBeGreaterThan(least)
  })
})
