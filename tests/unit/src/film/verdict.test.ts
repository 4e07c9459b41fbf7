import { describe, expect, it } from 'vitest'
import { defaultFilmSettings, type Study } from '#shared/contracts/studies.ts'
import { printerTime, rulerOf, stepText, surenessOf, verdictOf } from '@/components/film/verdict.ts'
import { printerLimits } from '@/composables/useFilmAnswer.ts'
import { exposureOnPrinter as onPrinter } from '#shared/film/index.ts'
import { filmAnswer } from '@/workers/film-answer.ts'
import type { CurrentReading, FilmQuestion, ShownExposure } from '@/workers/film-answer-types.ts'
import { filmComparisons } from '@/workers/film-comparisons.ts'
import { ReadingBook } from '@/workers/reading-book.ts'

const printer = { exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60, irradianceMilliwattsPerSquareCentimetre: 3.4, lightEngineWavelengthNanometres: 405 }
const study: Study = {
  id: 't', version: 1, createdAt: '', updatedAt: '', retiredAt: null, name: 'Grey', lotId: null, layerHeightMicrometres: 50, resinTemperatureCelsius: null, notes: '', pairingId: 'p', printerId: 'a',
  printerName: 'North', resinId: 'r', resinName: 'Grey', lotCode: null, printer, exposureKind: 'seconds', state: 'open', detailTarget: null, film: defaultFilmSettings, readingsRevision: 1, filmReadingCount: 0,
}
const limits = printerLimits(study)
const question: FilmQuestion = { exposureKind: 'seconds', film: defaultFilmSettings, layerHeightMicrometres: 50, printer: limits, otherLayerHeightMicrometres: null }
/** depth = 160 ln(E / 1.13): 2.11 s for 100 µm, with errors of some micrometres. */
const readings: readonly CurrentReading[] = [1.6, 2.1, 2.9, 4, 5.7, 8.2].map((exposure, i) => ({
  id: `r${i}`, exposure, replicate: 1, depthMicrometres: 160 * Math.log(exposure / 1.13) + ([2, -3, 1, 4, -2, -1][i] ?? 0), standardUncertaintyMicrometres: null, state: 'measured',
}))
const first: CurrentReading = { id: 'r0', exposure: 1.6, replicate: 1, depthMicrometres: 61.95, standardUncertaintyMicrometres: null, state: 'measured' }
const answerOf = (given = readings, asked = question) => filmAnswer(asked, given).answer

describe('the verdict', () => {
  it('gives the printer step, the estimate with its interval in the same breath, and what to do next', () => {
    const verdict = verdictOf(study, answerOf(), limits, 0)
    expect(verdict.use).toBe('2.1 s')
    expect(verdict.estimate).toMatch(/^2\.\d+ s, \d\.\d+ to \d\.\d+$/)
    expect(verdict.next).toContain('print')
  })

  it('names no exposure where the films leave one end open', () => {
    const verdict = verdictOf(study, answerOf(readings.slice(0, 2)), limits, 0)
    expect(verdict.use).toBeNull()
    expect(verdict.sureness.kind).toBe('serious')
  })

  it('says what to do first where nothing is measured, and counts the planned films', () => {
    expect(verdictOf(study, answerOf([]), limits, 0).next).toContain('Plan films')
    expect(verdictOf(study, answerOf(readings.slice(0, 3)), limits, 2).next).toContain('2 planned films')
  })

  it('asks to look at a marked film before anything else', () => {
    const slip = readings.map((reading, i) => (i === 2 ? { ...reading, depthMicrometres: 85_000 } : reading))
    expect(verdictOf(study, answerOf(slip), limits, 0).next).toContain('marked film')
  })

  it('does not call a narrow interval good while the films speak against the curve', () => {
    // Light of two kinds: depth bends upwards, so evenly that the straight line's interval stays narrow.
    const bent: readonly CurrentReading[] = [1.6, 1.6, 2.1, 2.1, 2.9, 2.9, 4, 4, 5.7, 5.7, 8.2, 8.2].map((exposure, i) => ({
      ...first, id: `b${i}`, exposure, replicate: 1 + (i % 2), depthMicrometres: 120 * Math.log(exposure / 1.13) + 30 * Math.log(exposure / 1.13) ** 2 + (i % 2),
    }))
    const verdict = verdictOf(study, answerOf(bent), limits, 0)
    expect(verdict.sureness.word).toBe('In doubt.')
    expect(verdict.next).toContain('what the films say')
  })

  it('tells the printer seconds where the study counts mJ/cm², and says what that rests on', () => {
    const dose: Study = { ...study, exposureKind: 'mJ/cm2' }
    const doses = readings.map(reading => ({ ...reading, exposure: reading.exposure * 3.4 }))
    const verdict = verdictOf(dose, answerOf(doses, { ...question, exposureKind: 'mJ/cm2', printer: printerLimits(dose) }), printerLimits(dose), 0)
    expect(verdict.use).toBe('2.1 s')
    expect(verdict.estimate).toContain('mJ/cm²')
    expect(verdict.remarks.join()).toContain('3.4 mW/cm²')
    expect(stepText(2.1, study)).toBe('2.1 s')
    expect(printerTime(2.1 * 3.4, dose)).toBe('2.1 s')
    expect(printerTime(2.1, study)).toBeNull()
  })

  it('does not call an extrapolated answer good', () => {
    const answer: ShownExposure = { value: 2, meanInterval: { kind: 'finite', lower: 1.99, upper: 2.01 }, singleInterval: null, depthMicrometres: 100, extrapolated: true, step: 2, beyondPrinter: null }
    expect(surenessOf(answer, limits, 8).kind).toBe('caution')
    expect(surenessOf({ ...answer, extrapolated: false }, limits, 8).kind).toBe('good')
  })

  it('shows the whole range of exposures on the ruler, however many films there are', () => {
    const many = Array.from({ length: 3000 }, (_, i): CurrentReading => ({ ...(readings[i % 6] ?? first), id: `m${i}`, replicate: i }))
    const { dots } = rulerOf(study, answerOf(many.sort((a, b) => a.exposure - b.exposure)), limits, [])
    expect(new Set(dots.map(dot => dot.exposure)).size).toBe(6)
    expect(dots.length).toBeLessThanOrEqual(24)
  })
})

describe('onPrinter', () => {
  it('rounds to the step and stays inside what the printer can do, saying so', () => {
    expect(onPrinter(2.04, limits)).toEqual({ step: 2, beyondPrinter: null })
    expect(onPrinter(2.06, limits)).toEqual({ step: 2.1, beyondPrinter: null })
    expect(onPrinter(0.3, limits)).toEqual({ step: 0.5, beyondPrinter: 'below' })
    expect(onPrinter(75, limits)).toEqual({ step: 60, beyondPrinter: 'above' })
    expect(onPrinter(2, { step: null, min: null, max: null })).toEqual({ step: null, beyondPrinter: null })
  })
})

describe('filmComparisons', () => {
  it('refuses more readings than it can compare in time, and compares all curves otherwise', () => {
    expect(filmComparisons(question, Array.from({ length: 5001 }, () => first), 100).kind).toBe('refused')
    const compared = filmComparisons(question, readings, 100)
    expect(compared.kind === 'compared' ? compared.models.map(model => model.model) : []).toEqual(['straight-line', 'dead-time', 'quadratic', 'two-line'])
  })
})

describe('an accepted curve', () => {
  it('drives the headline, and falls back to the straight line with a remark where it cannot be fitted', () => {
    const bent = answerOf(readings, { ...question, film: { ...defaultFilmSettings, model: 'quadratic' } })
    expect(bent).toMatchObject({ kind: 'fitted', curve: 'quadratic', curveRemark: null })
    const few = answerOf(readings.slice(0, 3), { ...question, film: { ...defaultFilmSettings, model: 'two-line-attenuation' } })
    expect(few).toMatchObject({ kind: 'fitted', curve: 'straight-line' })
    expect(few.kind === 'fitted' ? few.curveRemark : '').toContain('straight line is used')
  })
})

describe('ReadingBook', () => {
  const stored = readings.map(reading => ({ ...reading, exposureText: '', depthText: '', exclusionReason: null, note: '', version: 1, importBatchId: null, enteredBy: '', enteredAt: '', updatedAt: '' }))

  it('lays what was typed over what is stored, and hides what was cleared', () => {
    const book = new ReadingBook()
    book.replace(stored)
    const over = { typed: [{ ...first, depthMicrometres: 1 }], hiddenIds: ['r5'] }
    const current = book.current(over)
    expect(current).toHaveLength(5)
    expect(current[0]?.depthMicrometres).toBe(1)
  })

  it('does not let an older answer replace a newer reading', () => {
    const book = new ReadingBook()
    book.replace(stored.map(reading => ({ ...reading, version: 3 })))
    book.take(stored.map(reading => ({ ...reading, depthMicrometres: 0 })), [])
    expect(book.ordered()[0]?.version).toBe(3)
  })

  it('gives a page of rows and columns, with planned rows among the stored ones', () => {
    const book = new ReadingBook()
    book.replace(stored)
    const page = book.page({ rowOffset: 1, rowCount: 2, columnOffset: 0, columnCount: 3, exposureFrom: null, exposureTo: null, extraExposures: [1.8] })
    expect(page.rows.map(row => row.exposure)).toEqual([1.8, 2.1])
    expect(page).toMatchObject({ rowTotal: 7, readingTotal: 6, columnTotal: 1 })
    expect(book.page({ rowOffset: 0, rowCount: 30, columnOffset: 0, columnCount: 3, exposureFrom: 2, exposureTo: 4, extraExposures: [] }).rows).toHaveLength(3)
  })
})
