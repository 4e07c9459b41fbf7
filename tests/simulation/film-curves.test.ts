import { describe, expect, it } from 'vitest'
import { seededRandom } from '#shared/stats/index.ts'
import { censoredCoverage, censoredDesigns, censoredQuantities, deadTimeCoverage, deadTimeDesigns, deadTimeQuantities } from './film-curves-coverage.ts'

/** Short form of `npm run simulate film-curves`: 300 sets give a Monte Carlo error of 1.3 points; limits leave four of them. */
const sets = 300
const within = 0.052

describe('intervals of the film curve with films that did not form', () => {
  it.each(censoredDesigns.filter((_, i) => i !== 1).map((design, i) => ({ ...design, seed: 20 + i })))(
    'hold 95 %% of the truths: $levels exposures of $replicates, scatter $micrometres µm',
    ({ seed, ...design }) => {
      const result = censoredCoverage({ design, fit: 'censored', sets, random: seededRandom(seed) })
      for (const quantity of censoredQuantities) expect(Math.abs(result[quantity].coverage - 0.95)).toBeLessThan(within)
      expect(result.missing).toBeGreaterThan(1)
      expect(result.refusals).toBeLessThan(0.01)
    },
  )

  it('are narrower than without the missing films, for the critical exposure', () => {
    const design = { levels: 8, replicates: 1, micrometres: 5 }
    const [used, dropped] = (['censored', 'dropped'] as const).map(fit => censoredCoverage({ design, fit, sets, random: seededRandom(30) }))
    expect(used?.Ec.medianRelativeWidth).toBeLessThan(0.95 * (dropped?.Ec.medianRelativeWidth ?? 0))
  })
})

describe('intervals of the dead-time curve', () => {
  it.each(deadTimeDesigns.map((design, i) => ({ ...design, seed: 40 + i })))(
    'hold 95 %% of the truths: $levels exposures of $replicates, scatter $micrometres µm',
    ({ seed, ...design }) => {
      const result = deadTimeCoverage({ design, sets, random: seededRandom(seed) })
      for (const quantity of deadTimeQuantities) expect(Math.abs(result[quantity].coverage - 0.95)).toBeLessThan(within)
      expect(result.refusals).toBeLessThan(0.01)
    },
  )
})
