import { describe, expect, it } from 'vitest'
import { compareFilmModels, fitQuadraticCurve, fitWorkingCurve, modelDepthAt, modelExposureForDepth, type ComparedModel } from '#shared/film/index.ts'
import { fittedOnly, measured, scatterMicrometres } from './readings.ts'

const exposures = [8, 11, 15, 21, 30, 42, 60, 84]
const bent = (bend: number, size = 1) =>
  measured(exposures, exposures.map((e, i) => 90 * Math.log(e / 6) + bend * (Math.log(e / 25)) ** 2 + size * (scatterMicrometres[i] ?? 0)))

function compare(bend: number, depthMicrometres = 120, size = 1) {
  const comparison = compareFilmModels({ readings: bent(bend, size), exposureKind: 'mJ/cm2', depthMicrometres })
  if (comparison.kind === 'refused') throw new Error(comparison.detail)
  return comparison
}

function model(bend: number, name: string): ComparedModel {
  const found = compare(bend).models.find(one => one.model === name)
  if (found?.kind !== 'compared') throw new Error(`${name} was refused`)
  return found
}

describe('compareFilmModels', () => {
  it('keeps the straight line for straight films, and lists it first', () => {
    const comparison = compare(0)
    expect(comparison.preferred).toBe('straight-line')
    expect(comparison.models[0]).toMatchObject({ model: 'straight-line', aiccChange: 0, changePercent: 0 })
    expect(comparison.models.map(one => one.model)).toEqual(['straight-line', 'dead-time', 'quadratic', 'two-line'])
    expect(comparison.sentence).toContain('keep it')
  })

  it.each([14, -14])('prefers another curve for films that bend by %i and says what it does to the answer', bend => {
    const comparison = compare(bend)
    expect(comparison.preferred).not.toBe('straight-line')
    expect(comparison.sentence).toMatch(/% (less|more) exposure for 120 µm/)
  })

  it('sees that a curve which steepens asks for more exposure in the middle, one which flattens for less', () => {
    const [steeper, flatter] = [model(14, 'quadratic').changePercent ?? 0, model(-14, 'quadratic').changePercent ?? 0]
    expect(steeper).toBeGreaterThan(1)
    expect(flatter).toBeLessThan(-1)
  })

  it('gives an F that is the square of the t of the bend', () => {
    const fit = fittedOnly(fitQuadraticCurve({ readings: bent(5), exposureKind: 'mJ/cm2' }))
    expect(model(5, 'quadratic').test?.f).toBeCloseTo((fit.bendMicrometres.value / fit.bendMicrometres.standardError) ** 2, 6)
  })

  it('offers no AICc where too few films are left for its correction', () => {
    const comparison = compareFilmModels({ readings: bent(14).slice(0, 5), exposureKind: 'mJ/cm2', depthMicrometres: 80 })
    if (comparison.kind === 'refused') throw new Error(comparison.detail)
    expect(comparison.models.find(one => one.model === 'quadratic')).toMatchObject({ aicc: Infinity })
    expect(comparison.preferred).toBe('straight-line')
  })

  it('keeps the straight line for six films, however sure the bend: three parameters cost too much there', () => {
    const comparison = compareFilmModels({ readings: bent(14).slice(0, 6), exposureKind: 'mJ/cm2', depthMicrometres: 80 })
    if (comparison.kind === 'refused') throw new Error(comparison.detail)
    const quadratic = comparison.models.find(one => one.model === 'quadratic')
    if (quadratic?.kind !== 'compared' || quadratic.test === null) throw new Error('compared')
    expect(quadratic.test.pValue).toBeLessThan(0.01)
    expect(quadratic.aiccChange).toBeGreaterThan(0)
    expect(comparison.preferred).toBe('straight-line')
  })

  it('passes on the refusal of films that tell no line', () => {
    expect(compareFilmModels({ readings: [], exposureKind: 'seconds', depthMicrometres: 100 })).toMatchObject({ kind: 'refused', reason: 'no-films' })
  })
})

describe('fitQuadraticCurve and its answers', () => {
  it('gives the straight line and its Fieller interval as the bend vanishes', () => {
    const readings = bent(0)
    const line = fittedOnly(fitWorkingCurve({ readings, exposureKind: 'mJ/cm2' }))
    const fit = fittedOnly(fitQuadraticCurve({ readings, exposureKind: 'mJ/cm2' }))
    const answer = modelExposureForDepth(fit, 120)
    if (answer.kind !== 'answered') throw new Error(answer.detail)
    expect(answer.value / Math.exp(line.centre.meanLogExposure + (120 - line.centre.meanDepthMicrometres) / line.penetrationDepthMicrometres.value)).toBeCloseTo(1, 2)
    expect(modelDepthAt(fit, answer.value).depthMicrometres).toBeCloseTo(120, 9)
  })

  it('holds exactly the exposures whose band covers the target', () => {
    const fit = fittedOnly(fitQuadraticCurve({ readings: bent(5), exposureKind: 'mJ/cm2' }))
    const answer = modelExposureForDepth(fit, 120)
    if (answer.kind !== 'answered' || answer.meanInterval.kind !== 'finite') throw new Error('finite answer')
    const [low, high] = [modelDepthAt(fit, answer.meanInterval.lower).confidenceInterval, modelDepthAt(fit, answer.meanInterval.upper).confidenceInterval]
    expect(low.kind === 'finite' && low.upper).toBeCloseTo(120, 6)
    expect(high.kind === 'finite' && high.lower).toBeCloseTo(120, 6)
  })

  it('refuses a depth beyond the turn of the curve and marks one beyond the films', () => {
    const fit = fittedOnly(fitQuadraticCurve({ readings: bent(-14), exposureKind: 'mJ/cm2' }))
    expect(modelExposureForDepth(fit, 900)).toMatchObject({ kind: 'refused', reason: 'depth-not-reached' })
    expect(modelExposureForDepth(fit, 230)).toMatchObject({ extrapolated: true })
    expect(modelExposureForDepth(fit, 100)).toMatchObject({ extrapolated: false })
  })
})
