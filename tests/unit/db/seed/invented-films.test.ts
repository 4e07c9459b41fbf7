import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { demoTruths, inventFilms, straightCurve, twoLineCurve } from '#db/seed/invented-films.ts'
import { fitWorkingCurve } from '#shared/film/index.ts'

const fitOf = (name: keyof typeof demoTruths) => fitWorkingCurve({
  readings: inventFilms(demoTruths[name]).map(film => ({ exposure: film.exposure, depthMicrometres: film.depthMicrometres, state: 'measured' as const })),
  exposureKind: 'seconds', weighting: 'equal', confidenceLevel: 0.99,
})

describe('invented films', () => {
  it('are the same every time', () => {
    expect(inventFilms(demoTruths.northGrey)).toEqual(inventFilms(demoTruths.northGrey))
  })

  it.each([['northGrey', 160, 1.1], ['southGrey', 160, 1.485], ['wideAmber', 210, 2.4], ['southSand', 120, 1.6]] as const)('let the fit of %s find Dp %d and Ec %d inside its 99 % limits', (name, penetrationDepth, criticalExposure) => {
    const fit = fitOf(name)
    if (fit.kind !== 'fitted') throw new Error(fit.reason)
    for (const [estimate, truth] of [[fit.penetrationDepthMicrometres, penetrationDepth], [fit.criticalExposure, criticalExposure]] as const) {
      if (estimate.interval.kind !== 'finite') throw new Error('no finite interval')
      expect(estimate.interval.lower).toBeLessThan(truth)
      expect(estimate.interval.upper).toBeGreaterThan(truth)
    }
  })

  it('bend where two lines of light are behind them', () => {
    const fit = fitOf('cornerClear')
    expect(fit.kind === 'fitted' && fit.findings.map(finding => finding.code)).toContain('curvature')
  })

  // Exposures at z = 50, 100 and 200 µm for Dp 50 and 200 µm, Ec 1: computed independently, given to four digits.
  it.each([[1.744, 50], [2.696, 100], [5.179, 200]])('put the depth of two lines at E/Ec = %d at %d µm', (ratio, depth) => {
    expect(twoLineCurve([50, 200], 1)(ratio)).toBeCloseTo(depth, 0)
  })

  it('put a straight curve at zero depth where the exposure is the critical one', () => {
    expect(straightCurve(160, 1.1)(1.1)).toBe(0)
  })

  it('say in fixtures/data/README.md what the code says', () => {
    const page = readFileSync(new URL('../../../../fixtures/data/README.md', import.meta.url), 'utf8')
    for (const text of ['160 µm · ln(E / 1.1 s)', '160 µm · ln(E / 1.485 s)', '210 µm · ln(E / 2.4 s)', '120 µm · ln(E / 1.6 s)', 'Dp 60 µm and 260 µm, Ec 6']) expect(page).toContain(text)
  })
})
