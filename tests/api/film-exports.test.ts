import Papa from 'papaparse'
import { v7 } from 'uuid'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { z } from 'zod'
import { eq } from 'drizzle-orm'
import { filmReading, study } from '#db/schema/index.ts'
import { filmReadingSchema, getFilmFit, type FilmReadingSave } from '#shared/contracts/film.ts'
import { importFilmReadings } from '#shared/contracts/film-imports.ts'
import { filmSettingsSchema } from '#shared/contracts/studies.ts'
import { exposureForDepth, fitQuadraticCurve, fitWorkingCurve, modelExposureForDepth, type WorkingCurveOptions } from '#shared/film/index.ts'
import { guessFilmImportMapping } from '#shared/imports/index.ts'
import { cell, csvHeaders, importPath, startFilmShop, type FilmClient, type FilmShop } from '#tests/helpers/film-shop.ts'

let shop: FilmShop
let engineer: FilmClient
let ids: Awaited<ReturnType<FilmShop['makeShop']>>
let path: string
let studyId: string

beforeAll(async () => {
  shop = await startFilmShop()
  ids = await shop.makeShop()
  engineer = await shop.signIn(ids.shopId, 'engineer', 'Edo, "the" Engineer')
})
beforeEach(async () => {
  ({ path, studyId } = await shop.makeStudy(ids))
})
afterAll(() => shop.close())

async function save(...readings: readonly FilmReadingSave[]) {
  expect((await engineer.send('POST', `${path}/film-readings/save`, { body: { readings } })).status).toBe(200)
}
async function get(name: string) {
  const response = await engineer.send('GET', `${path}/${name}`)
  expect(response.status).toBe(200)
  return { text: await response.text(), type: response.headers.get('Content-Type'), disposition: response.headers.get('Content-Disposition') }
}
const table = (text: string) => Papa.parse<Record<string, string>>(text, { header: true, newline: '\r\n', skipEmptyLines: true }).data

// 100 ln(E / 10) with small errors. Line on ln E computed outside (Python 3, textbook sums): Dp 99.18045922, its standard
// error 1.53583974, Ec 9.87436196, s 3.09111772.
const regression = [[15, 42.55], [20, 66.31], [30, 110.86], [40, 142.63], [60, 177.18], [80, 206.94], [100, 233.26], [120, 244.49]] as const
const films = () => regression.map(([exposure, depthMicrometres]) => cell({ exposure, exposureText: String(exposure), depthMicrometres, depthText: `${depthMicrometres} µm` }))

describe('the readings as CSV', () => {
  it('are read back reading by reading: names with units, ISO instants, one row each', async () => {
    const readings = [
      cell({ exposure: 1.7, exposureText: '1,7 s', depthMicrometres: 430.25, depthText: '0,43025 mm', standardUncertaintyMicrometres: 2.5, note: 'a, "b"\nc' }),
      cell({ exposure: 1.7, replicate: 2, state: 'excluded', exclusionReason: 'torn', depthMicrometres: -3 }),
      cell({ exposure: 2.1, state: 'no-film', depthMicrometres: null, depthText: '' }),
    ]
    await save(...readings)
    const { text, type, disposition } = await get('film-readings.csv')
    expect(type).toBe('text/csv; charset=utf-8')
    expect(disposition).toContain('film readings.csv')
    expect(text.split('\r\n')[0]).toBe('exposure_seconds,replicate,depth_micrometres,standard_uncertainty_micrometres,state,note,exclusion_reason,exposure_text,depth_text,entered_by,entered_at,updated_at,version,import_batch_id,reading_id')
    const rows = table(text)
    expect(rows).toMatchObject([
      { exposure_seconds: '1.7', replicate: '1', depth_micrometres: '430.25', standard_uncertainty_micrometres: '2.5', state: 'measured', note: 'a, "b"\nc', exposure_text: '1,7 s', depth_text: '0,43025 mm', entered_by: 'Edo, "the" Engineer', version: '1', reading_id: readings[0]?.id },
      { exposure_seconds: '1.7', replicate: '2', depth_micrometres: '-3', state: 'excluded', exclusion_reason: 'torn' },
      { exposure_seconds: '2.1', depth_micrometres: '', state: 'no-film' },
    ])
    for (const row of rows) z.iso.datetime().parse(row.entered_at)
  })

  it('escape what a spreadsheet would calculate and leave numbers alone', async () => {
    await save(cell({ note: '=HYPERLINK("http://quillmere.example")', depthText: '+A1', depthMicrometres: -1 }), cell({ replicate: 2, note: '@x', depthText: '-0.5' }))
    const rows = table((await get('film-readings.csv')).text)
    expect(rows).toMatchObject([{ note: '\'=HYPERLINK("http://quillmere.example")', depth_text: "'+A1", depth_micrometres: '-1' }, { note: "'@x", depth_text: '-0.5' }])
  })

  it('name mJ/cm² in the header of a study that counts so', async () => {
    const other = await shop.makeStudy(ids, 'mJ/cm2')
    const response = await engineer.send('GET', `${other.path}/film-readings.csv`)
    expect(await response.text()).toMatch(/^exposure_mj_per_cm2,replicate,/)
  })

  it('go back in through an import with the mapping that is guessed from their header, number by number', async () => {
    await save(
      ...films(), cell({ exposure: 15, replicate: 2, depthMicrometres: 123.456_789, standardUncertaintyMicrometres: 1.5, note: '=1+1' }),
      cell({ exposure: 9, state: 'no-film', depthMicrometres: null, depthText: '' }), cell({ exposure: 10, state: 'excluded', exclusionReason: 'why', note: 'why', depthMicrometres: 4 }),
    )
    const { text } = await get('film-readings.csv')
    const { mapping, unsure } = guessFilmImportMapping({ rows: Papa.parse<string[]>(text.trim()).data, encoding: 'utf-8', delimiter: ',' }, 'seconds')
    expect(unsure).toEqual([])
    const other = await shop.makeStudy(ids)
    const answer = importFilmReadings.response?.parse(await (await engineer.send('PUT', importPath(other.path, v7(), mapping), { body: text, headers: csvHeaders })).json())
    expect(answer?.rejected).toEqual([])
    const numbers = (csv: string) => table(csv).map(row => [row.exposure_seconds, row.replicate, row.depth_micrometres, row.standard_uncertainty_micrometres, row.state, row.note, row.exclusion_reason])
    expect(numbers(await (await engineer.send('GET', `${other.path}/film-readings.csv`)).text())).toEqual(numbers(text))
  })

  it('leave out withdrawn readings and hold every other one', async () => {
    const cells = Array.from({ length: 2000 }, (_, i) => cell({ exposure: 1 + Math.floor(i / 10), replicate: (i % 10) + 1 }))
    await save(...cells)
    await save({ ...cells[0], ...cell({ id: cells[0]?.id ?? '', exposure: 1, withdrawn: true, baseVersion: 1 }) })
    expect(table((await get('film-readings.csv')).text)).toHaveLength(1999)
  })

  it('have a header and no row where there are no readings', async () => {
    expect(table((await get('film-readings.csv')).text)).toEqual([])
  })
})

describe('the fit as CSV', () => {
  it('has parameters, covariance and answers that agree with numbers from outside', async () => {
    await save(...films())
    const { text, type } = await get('film-fit.csv')
    expect(type).toBe('text/csv; charset=utf-8')
    const rows = new Map(table(text).map(row => [row.quantity, row]))
    const value = (quantity: string) => Number(rows.get(quantity)?.value)
    expect(value('penetration_depth')).toBeCloseTo(99.180_459_22, 7)
    expect(value('critical_exposure')).toBeCloseTo(9.874_361_96, 7)
    expect(value('residual_standard_deviation')).toBeCloseTo(3.091_117_72, 7)
    expect(Number(rows.get('penetration_depth')?.standard_error)).toBeCloseTo(1.535_839_74, 7)
    expect(rows.get('critical_exposure')).toMatchObject({ unit: 'seconds', interval_kind: 'finite' })
    expect(Number(rows.get('critical_exposure')?.lower)).toBeLessThan(9.874)
    expect(value('films')).toBe(8)
    // 50 µm layer and 50 µm overcure: the exposure that cures 100 µm.
    expect(value('exposure_for_layer.constant-overcure')).toBeCloseTo(9.874_361_96 * Math.exp(100 / 99.180_459_22), 6)
    expect(rows.get('exposure_for_layer.constant-overcure')?.remark).toContain('rule of this study')
    expect([...rows.keys()]).toEqual(expect.arrayContaining(['covariance.intercept_slope', 'exposure_for_layer.constant-ratio', 'exposure_for_layer.far-side-dose', 'inputs_hash', 'library_version']))
  })

  it('tells the number of the curve that was accepted for the study, as the chapter does', async () => {
    await save(...films())
    const stored = JSON.parse((await get('film.json')).text)
    await shop.pool.query(`update study set film = jsonb_set(film, '{model}', '"quadratic"') where id = $1`, [studyId])
    const quadratic = fitQuadraticCurve(stored.fit.inputs)
    const expected = quadratic.kind === 'fitted' ? modelExposureForDepth(quadratic, 100) : null
    if (expected?.kind !== 'answered') throw new Error('must answer')
    const rows = new Map(table((await get('film-fit.csv')).text).map(row => [row.quantity, row]))
    expect(Number(rows.get('exposure_for_layer')?.value)).toBe(expected.value)
    expect(rows.get('exposure_for_layer')?.remark).toContain('by the quadratic curve')
    expect(rows.get('model')?.remark).toContain('straight-line (the study answers with the quadratic curve')
    expect(JSON.parse((await get('film.json')).text).answer).toMatchObject({ curve: 'quadratic', remark: null, exposureForLayer: { kind: 'answered', value: expected.value } })
    expect(stored.answer).toMatchObject({ curve: 'straight-line', exposureForLayer: { value: stored.exposuresForLayer.byRule[0].value } })
  })

  it.each([[2000, 'answered'], [2001, 'refused']])('of %i readings by another curve is %s: nobody waits seconds for an export', async (count, kind) => {
    const rows = Array.from({ length: count }, (_, i) => ({
      id: v7(), shopId: ids.shopId, studyId, exposure: 20 + (i % 10) * 5, exposureText: '', replicate: i, depthMicrometres: 100 * Math.log((20 + (i % 10) * 5) / 10) + (i % 7) - 3, depthText: '', state: 'measured' as const,
    }))
    await shop.db.insert(filmReading).values(rows)
    await shop.pool.query(`update study set film = jsonb_set(film, '{model}', '"quadratic"') where id = $1`, [studyId])
    expect(JSON.parse((await get('film.json')).text).answer.exposureForLayer.kind).toBe(kind)
    // The straight line of all readings is there whatever their number.
    expect(table((await get('film-fit.csv')).text).find(row => row.quantity === 'films')?.value).toBe(String(count))
  })

  it('says why there is no fit', async () => {
    await save(cell())
    const rows = table((await get('film-fit.csv')).text)
    expect(rows[0]).toMatchObject({ quantity: 'refused', remark: expect.stringContaining('one-film') })
  })
})

describe('the fit as the server makes it', () => {
  it('is the one that the exports carry', async () => {
    await save(...films())
    const fit = getFilmFit.response?.parse(JSON.parse((await get('film-fit')).text))
    const exported = JSON.parse((await get('film.json')).text)
    expect(fit).toEqual({ inputsHash: exported.fit.inputsHash, libraryVersion: exported.fit.libraryVersion, outcome: exported.fit.outcome })
  })
})

describe('the film chapter as JSON', () => {
  const chapterSchema = z.object({
    kind: z.literal('fanlight-film'), formatVersion: z.literal(1), exportedAt: z.iso.datetime(),
    study: z.object({ id: z.string(), name: z.string(), printerName: z.string(), resinName: z.string(), layerHeightMicrometres: z.number(), readingsRevision: z.number() }),
    settings: filmSettingsSchema, readings: z.array(filmReadingSchema.loose()),
    fit: z.object({ libraryVersion: z.string(), inputsHash: z.string().regex(/^[0-9a-f]{64}$/), inputs: z.custom<WorkingCurveOptions>(), outcome: z.looseObject({ kind: z.string() }) }),
    exposuresForLayer: z.looseObject({ byRule: z.array(z.looseObject({ value: z.number() })) }).nullable(),
  })
  const chapter = async () => chapterSchema.parse(JSON.parse((await get('film.json')).text))

  it('holds study, settings, readings, fit and the exposure by each rule', async () => {
    await save(...films())
    const { study: exported, readings, exposuresForLayer, fit } = await chapter()
    expect(exported).toMatchObject({ id: studyId, printerName: 'Bench', resinName: 'Grey', readingsRevision: 1 })
    expect(readings.map(reading => [reading.exposure, reading.depthMicrometres])).toEqual(regression)
    expect(fit.outcome).toMatchObject({ kind: 'fitted', penetrationDepthMicrometres: { value: expect.closeTo(99.18, 2) }, covariance: [[expect.any(Number), expect.any(Number)], [expect.any(Number), expect.any(Number)]] })
    expect(exposuresForLayer?.byRule).toHaveLength(3)
  })

  it('can be computed again from its own inputs to the same digits', async () => {
    await save(...films(), cell({ exposure: 9, state: 'no-film', depthMicrometres: null, depthText: '' }), cell({ exposure: 30, replicate: 2, state: 'excluded', exclusionReason: 'x', depthMicrometres: 1 }))
    const { fit, exposuresForLayer } = await chapter()
    const again = fitWorkingCurve(fit.inputs)
    expect(fit.outcome).toEqual(JSON.parse(JSON.stringify(again)))
    // Nothing in it is a number that JSON cannot hold.
    expect(fit.outcome).toEqual(again)
    expect(again.kind === 'fitted' && exposureForDepth(again, 100).value).toBe(exposuresForLayer?.byRule[0]?.value)
  })

  it('has a hash that follows the numbers, not the ids, the texts or who typed them', async () => {
    await save(...films())
    const before = (await chapter()).fit.inputsHash
    const twin = await shop.makeStudy(ids)
    const first = path
    path = twin.path
    await save(...films().map(film => ({ ...film, note: 'another note', exposureText: 'x' })))
    expect((await chapter()).fit.inputsHash).toBe(before)
    await save(cell({ exposure: 200, depthMicrometres: 300 }))
    expect((await chapter()).fit.inputsHash).not.toBe(before)
    path = first
    await shop.db.update(study).set({ name: 'Another name' }).where(eq(study.id, studyId))
    expect((await chapter()).fit.inputsHash).toBe(before)
  })

  it('says why there is no fit and gives no exposure then', async () => {
    const { fit, exposuresForLayer } = await chapter()
    expect(fit.outcome).toMatchObject({ kind: 'refused', reason: 'no-films' })
    expect(exposuresForLayer).toBeNull()
  })

  it('is named after the study, whatever letters that has', async () => {
    await shop.db.update(study).set({ name: 'Größe "A/B" \n 漢字' }).where(eq(study.id, studyId))
    const { disposition } = await get('film.json')
    expect(disposition).toContain("filename*=UTF-8''Gr%C3%B6%C3%9Fe%20A%20B%20%E6%BC%A2%E5%AD%97%20film.json")
    expect(disposition).not.toMatch(/[\r\n]/)
  })
})

it.each(['film-readings.csv', 'film-fit.csv', 'film.json'])('%s of a study of another shop is not found', async name => {
  const other = await shop.makeStudy(await shop.makeShop())
  expect((await engineer.send('GET', `/api/shops/${ids.shopId}/studies/${other.studyId}/${name}`)).status).toBe(404)
  expect((await engineer.send('GET', `${other.path}/${name}`)).status).toBe(404)
})
