import { describe, expect, it } from 'vitest'
import { seededRandom } from '#shared/stats/index.ts'
import { gradedCoverage } from './graded-coverage.ts'
import { runPlanner } from './planner-against-practice.ts'
import { edgeCoverage } from './window-coverage.ts'

/** Monte Carlo error of a share of 200 near 95 % is 1.5 points: three of them below 92.5 %, the prototype's lowest cell. */
const coverageMin = 0.88

describe('intervals of an edge (short form of `npm run simulate window`)', () => {
  it.each([
    [{ prints: 4, steepness: 1, spread: 0.3 }, 0.22],
    [{ prints: 4, steepness: 4, spread: 0 }, 0.08],
    [{ prints: 5, steepness: 2, spread: 0.5 }, 0.13],
    [{ prints: 7, steepness: 2, spread: 0.3 }, 0.11],
  ])('hold the truth in about 95 % of ladders and are narrow: %o', (cell, width) => {
    const result = edgeCoverage(cell, { sets: 200, random: seededRandom(11) })
    for (const share of result.covered) expect(share).toBeGreaterThan(coverageMin)
    expect(result.width[0]).toBeLessThan(width * 1.25)
  })
})

describe('graded tiers (short form of `npm run simulate graded`)', () => {
  it('hold the edge at a size and the finest detail in about 95 % of cases', () => {
    const result = gradedCoverage({ prints: 4, spread: 0.3, sets: 60, random: seededRandom(3) })
    expect(result.edge).toBeGreaterThan(coverageMin)
    expect(result.detailLimit).toBeGreaterThan(coverageMin)
    expect(result.effectiveShare).toBeGreaterThan(0.1)
  })
})

describe('the planner (short form of `npm run simulate planner`)', () => {
  it('from a guess needs no more minutes than practice, and ends within one step', () => {
    const result = runPlanner({ sets: 24, centreSd: 0.3, care: 'balanced', random: seededRandom(5) })
    // By hand, coarse then fine until bracketed: 121 minutes and 94.7 %.
    expect(result.minutes).toBeLessThan(121)
    expect(result.withinOneStep).toBeGreaterThanOrEqual(0.92)
  })

  it('from a film curve needs fewer still', () => {
    const result = runPlanner({ sets: 24, centreSd: 0.1, care: 'balanced', random: seededRandom(6) })
    expect(result.minutes).toBeLessThan(103)
    expect(result.withinOneStep).toBeGreaterThanOrEqual(0.92)
  })
})
