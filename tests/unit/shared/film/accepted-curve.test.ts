import { describe, expect, it } from 'vitest'
import {
  acceptedCurve, curveExposureForLayer, exposureForLayer, exposureOnPrinter, fitDeadTimeCurve, fitWorkingCurve, missingFilmLimit, modelExposureForDepth,
  type FilmReading, type WorkingCurveFit,
} from '#shared/film/index.ts'
import { filmAnswer } from '@/workers/film-answer.ts'
import { defaultFilmSettings } from '#shared/contracts/studies.ts'

/** Made up: depth = 100 ln((t − 0.4)/0.6), with a little scatter of unequal sizes. */
const scatter = [0.8, -1.1, 0.4, 1.3, -0.9, 0.2, -0.7]
const exposures = [1.4, 1.8, 2.5, 3.5, 5, 8, 12]
const readings: FilmReading[] = exposures.map((exposure, i) => ({ exposure, depthMicrometres: 100 * Math.log((exposure - 0.4) / 0.6) + (scatter[i] ?? 0), state: 'measured' }))
const options = { exposureKind: 'seconds', readings } as const
const rule = { kind: 'constant-overcure', overcureMicrometres: 50 } as const
const layer = { layerHeightMicrometres: 50, rule }

function fitted(of: { readonly exposureKind: 'seconds'; readonly readings: readonly FilmReading[] }): WorkingCurveFit {
  const outcome = fitWorkingCurve(of)
  if (outcome.kind === 'refused') throw new Error(outcome.detail)
  return outcome
}
const straight = fitted(options)

describe('the curve that a study answers with', () => {
  it('is the straight line unless somebody accepted another', () => {
    const curve = acceptedCurve(options, straight, { model: 'straight-line', useCensored: true })
    expect(curve).toEqual({ name: 'straight-line', fit: straight, remark: null })
    expect(curveExposureForLayer(curve, straight, layer)).toEqual({ kind: 'answered', ...exposureForLayer(straight, layer) })
  })

  it('is the accepted one, and its answer is that curve’s, nearer to the truth of such films', () => {
    const curve = acceptedCurve(options, straight, { model: 'dead-time', useCensored: false })
    const own = fitDeadTimeCurve(options)
    if (own.kind !== 'fitted') throw new Error('must fit')
    const [answer, ownAnswer] = [curveExposureForLayer(curve, straight, layer), modelExposureForDepth(own, 100)]
    if (answer.kind === 'refused' || ownAnswer.kind === 'refused') throw new Error('must answer')
    expect(answer.value).toBe(ownAnswer.value)
    expect(answer.meanInterval).toEqual(ownAnswer.meanInterval)
    const truth = 0.4 + 0.6 * Math.E
    expect(Math.abs(answer.value - truth)).toBeLessThan(Math.abs(exposureForLayer(straight, layer).value - truth))
  })

  it('falls back to the straight line with a remark where the accepted one cannot be fitted', () => {
    const few = { ...options, readings: readings.slice(0, 2) }
    const line = fitted(few)
    const curve = acceptedCurve(few, line, { model: 'two-line-attenuation', useCensored: false })
    expect(curve.name).toBe('straight-line')
    expect(curve.remark).toMatch(/cannot be fitted to these films: .+ The straight line is used\.$/)
  })

  it('takes missing films in only where somebody wants it and there are some', () => {
    const withMissing = { ...options, readings: [...readings, { exposure: 0.7, depthMicrometres: 0, state: 'no-film' as const }] }
    const line = fitted(withMissing)
    expect(acceptedCurve(withMissing, line, { model: 'straight-line', useCensored: false }).name).toBe('straight-line')
    expect(acceptedCurve(withMissing, line, { model: 'straight-line', useCensored: true }).name).toBe('with-missing-films')
    expect(missingFilmLimit(line)).toBe(20)
  })

  it('refuses the rule that needs one Dp for a curve that has none', () => {
    const curve = acceptedCurve(options, straight, { model: 'quadratic', useCensored: false })
    expect(curveExposureForLayer(curve, straight, { ...layer, rule: { kind: 'far-side-dose' } }).kind).toBe('refused')
    expect(curveExposureForLayer(curve, straight, layer).kind).toBe('answered')
  })

  it('gives the page the same number', () => {
    const rows = readings.map((reading, i) => ({ ...reading, id: String(i), replicate: 1, standardUncertaintyMicrometres: null }))
    for (const model of ['straight-line', 'dead-time', 'quadratic'] as const) {
      const { answer } = filmAnswer({
        exposureKind: 'seconds', film: { ...defaultFilmSettings, model }, layerHeightMicrometres: 50, printer: { step: 0.1, min: 0.5, max: 60 }, otherLayerHeightMicrometres: null,
      }, rows)
      const expected = curveExposureForLayer(acceptedCurve({ ...options, weighting: 'equal', confidenceLevel: 0.95 }, straight, { model, useCensored: false }), straight, layer)
      if (answer.kind === 'refused' || 'kind' in answer.headline || expected.kind === 'refused') throw new Error(`${model} must answer`)
      expect(answer.headline.value).toBe(expected.value)
      expect(answer.headline.step).toBe(exposureOnPrinter(expected.value, { step: 0.1, min: null, max: null }).step)
    }
  })
})

describe('an exposure on a printer', () => {
  const printer = { step: 0.1, min: 0.5, max: 60 }
  it.each([
    [1.734, 1.7, null], [1.7500001, 1.8, null], [0.3, 0.5, 'below'], [0.5, 0.5, null], [60, 60, null], [60.01, 60, 'above'], [1e300, 60, 'above'],
  ] as const)('of %s s is %s s', (value, step, beyondPrinter) => {
    expect(exposureOnPrinter(value, printer)).toEqual({ step, beyondPrinter })
  })

  it('is at least one step, and has no step where none is known', () => {
    expect(exposureOnPrinter(0.01, { step: 0.1, min: null, max: null }).step).toBe(0.1)
    expect(exposureOnPrinter(12, { step: null, min: null, max: null })).toEqual({ step: null, beyondPrinter: null })
  })
})
