import { v7 } from 'uuid'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { study } from '#db/schema/index.ts'
import { saveFilmReadings } from '#shared/contracts/film.ts'
import { retirePairing } from '#shared/contracts/pairings.ts'
import { retirePrinter } from '#shared/contracts/printers.ts'
import { retireLot } from '#shared/contracts/resins.ts'
import { createStudy, defaultFilmSettings, getStudy, listStudies, updateStudy } from '#shared/contracts/studies.ts'
import { cell } from '#tests/helpers/film-shop.ts'
import { startTestApp, type TestApp, type TestMember } from '#tests/helpers/test-app.ts'
import { thingsBy } from '#tests/helpers/thing-shop.ts'

let app: TestApp
let owner: TestMember
let shopId: string
let add: ReturnType<typeof thingsBy>
let pairingId: string

beforeAll(async () => {
  app = await startTestApp()
  ;({ owner, shopId } = await app.makeShop())
  add = thingsBy(owner)
  pairingId = (await add.pairing()).id
})
afterAll(() => app.close())

const newStudy = () => ({ name: 'S', pairingId, lotId: null, layerHeightMicrometres: 50, resinTemperatureCelsius: null, notes: '' })
const plan = { exposures: [1, 2, 4], basis: 'own-choice' as const, expectedExposureAtTarget: null, plannedAt: '2026-05-01T08:00:00Z' }

describe('a new study', () => {
  it('is open, in seconds, with the film settings of a new study', async () => {
    expect(await owner.agent.ok(createStudy, { params: { shopId }, body: newStudy() })).toMatchObject({
      state: 'open', exposureKind: 'seconds', film: defaultFilmSettings, readingsRevision: 0, filmReadingCount: 0, version: 1, printer: { exposureStepSeconds: 0.1 },
    })
  })

  it.each([[0, 422], [1e-9, 201], [1000, 201], [1000.1, 422], [-50, 422], [null, 422], ['50', 422]])('of %s µm layers answers %i', async (layerHeightMicrometres, status) => {
    expect((await owner.agent.call(createStudy, { params: { shopId }, body: { ...newStudy(), layerHeightMicrometres } })).status).toBe(status)
  })

  it('of a retired pairing, or of one whose printer is retired, is refused', async () => {
    const retired = await add.pairing()
    await owner.agent.ok(retirePairing, { params: { shopId, pairingId: retired.id }, version: 1 })
    expect((await owner.agent.refused(createStudy, { params: { shopId }, body: { ...newStudy(), pairingId: retired.id } })).fields?.[0]?.path).toBe('body.pairingId')
    const orphan = await add.pairing()
    await owner.agent.ok(retirePrinter, { params: { shopId, printerId: orphan.printerId }, version: 1 })
    expect((await owner.agent.refused(createStudy, { params: { shopId }, body: { ...newStudy(), pairingId: orphan.id } })).detail)
      .toBe(`${orphan.printerName} is retired. Restore it first, or choose another pairing.`)
  })

  it('with pairing or lot of another shop is refused, and the database holds no such study either', async () => {
    const foreign = await app.makeShop('Foreign')
    const theirs = thingsBy(foreign.owner)
    const theirPairing = await theirs.pairing()
    const theirLot = await theirs.lot(theirPairing.resinId)
    expect((await owner.agent.refused(createStudy, { params: { shopId }, body: { ...newStudy(), pairingId: theirPairing.id } })).detail).toBe('There is no such pairing in this shop.')
    expect((await owner.agent.refused(createStudy, { params: { shopId }, body: { ...newStudy(), lotId: theirLot.id } })).detail).toBe('There is no such lot in this shop.')
    const row = { id: v7(), shopId, name: 'S', layerHeightMicrometres: 50, film: defaultFilmSettings }
    const constraintOf = async (values: typeof study.$inferInsert) => app.database.insert(study).values(values).then(() => null, error => error.cause?.constraint)
    expect(await constraintOf({ ...row, pairingId: theirPairing.id })).toBe('study_pairing_same_shop')
    expect(await constraintOf({ ...row, pairingId, lotId: theirLot.id })).toBe('study_lot_same_shop')
  })
})

describe('a change of a study', () => {
  it('keeps a lot that was retired since, and takes no other retired one', async () => {
    const pairing = await add.pairing()
    const [kept, other] = [await add.lot(pairing.resinId), await add.lot(pairing.resinId)]
    const made = await add.study(pairing.id, { lotId: kept.id })
    for (const lot of [kept, other]) await owner.agent.ok(retireLot, { params: { shopId, lotId: lot.id }, version: 1 })
    const params = { shopId, studyId: made.id }
    expect(await owner.agent.ok(updateStudy, { params, version: 1, body: { lotId: kept.id, notes: 'n' } })).toMatchObject({ lotId: kept.id, version: 2 })
    expect((await owner.agent.refused(updateStudy, { params, version: 2, body: { lotId: other.id } })).detail).toBe('This lot is retired. Restore it first, or choose another.')
    expect(await owner.agent.ok(updateStudy, { params, version: 2, body: { lotId: null } })).toMatchObject({ lotId: null, lotCode: null })
  })

  it('cannot move it to another pairing', async () => {
    const made = await add.study(pairingId)
    const problem = await owner.agent.refused(updateStudy, { params: { shopId, studyId: made.id }, version: 1, body: { pairingId: (await add.pairing()).id } })
    expect(problem.code).toBe('validation-failed')
  })

  it('of the unit is free while it is empty, and refused once it holds a reading or a plan', async () => {
    const made = await add.study(pairingId)
    const params = { shopId, studyId: made.id }
    expect(await owner.agent.ok(updateStudy, { params, version: 1, body: { exposureKind: 'mJ/cm2' } })).toMatchObject({ exposureKind: 'mJ/cm2', version: 2 })
    await owner.agent.ok(updateStudy, { params, version: 2, body: { film: { ...defaultFilmSettings, plan } } })
    expect((await owner.agent.refused(updateStudy, { params, version: 3, body: { exposureKind: 'seconds' } })).detail)
      .toBe('The film plan of this study is in mJ/cm². Remove the plan first, then change the unit.')
    expect(await owner.agent.ok(updateStudy, { params, version: 3, body: { exposureKind: 'seconds', film: defaultFilmSettings } })).toMatchObject({ version: 4 })
    await owner.agent.ok(saveFilmReadings, { params, body: { readings: [cell()] } })
    const problem = await owner.agent.refused(updateStudy, { params, version: 4, body: { exposureKind: 'mJ/cm2', notes: 'both or none' } })
    expect(problem.detail).toBe('This study holds 1 reading in seconds; their numbers would mean something else. Open another study instead.')
    expect(await owner.agent.ok(getStudy, { params })).toMatchObject({ exposureKind: 'seconds', notes: '', version: 4 })
    // The same unit is no change.
    await owner.agent.ok(updateStudy, { params, version: 4, body: { exposureKind: 'seconds' } })
  })

  it('of the unit and a first reading at the same moment: whoever comes second is told, or sees the new unit', async () => {
    for (let round = 0; round < 8; round++) {
      const made = await add.study(pairingId)
      const params = { shopId, studyId: made.id }
      // A reader of the old unit who holds the lock, then the change of the unit, then the save goes on.
      const client = await app.pool.connect()
      await client.query('begin')
      await client.query('select 1 from study where id = $1 for no key update', [made.id])
      const change = owner.agent.call(updateStudy, { params, version: 1, body: { exposureKind: 'mJ/cm2' } })
      await new Promise(resolve => setTimeout(resolve, 60))
      await client.query(`insert into film_reading (id, shop_id, study_id, exposure, exposure_text, replicate, depth_micrometres, depth_text, state) values ($1, $2, $3, 2, '2', 1, 400, '0.4', 'measured')`, [v7(), shopId, made.id])
      await client.query('commit')
      client.release()
      expect((await change).status).toBe(422)
    }
  })

  it('merges what is sent into what is stored, and a save of readings makes nobody’s edit stale', async () => {
    const made = await add.study(pairingId, { notes: 'kept', resinTemperatureCelsius: 22 })
    const params = { shopId, studyId: made.id }
    await owner.agent.ok(saveFilmReadings, { params, body: { readings: [cell()] } })
    expect(await owner.agent.ok(updateStudy, { params, version: 1, body: { state: 'paused' } })).toMatchObject({
      version: 2, state: 'paused', notes: 'kept', resinTemperatureCelsius: 22, readingsRevision: 1, filmReadingCount: 1, film: defaultFilmSettings,
    })
  })

  it('by two people at once is taken from one, and the other gets both versions to compare', async () => {
    const made = await add.study(pairingId)
    const params = { shopId, studyId: made.id }
    const answers = await Promise.all(['left', 'right'].map(notes => owner.agent.call(updateStudy, { params, version: 1, body: { notes } })))
    expect(answers.map(answer => answer.status).sort()).toEqual([200, 412])
    const stored = await owner.agent.ok(getStudy, { params })
    expect(answers.find(answer => answer.status === 412)?.body).toMatchObject({ code: 'stale-edit', current: stored })
  })

  it.each([
    ['an unknown state', { state: 'abandoned' }],
    ['a share above 0.999', { detailTarget: { mustFormSizeMicrometres: 100, mustStayOpenSizeMicrometres: null, shareMustForm: 1, shareMustStayOpen: 0.9 } }],
    ['half of the film settings', { film: { weighting: 'equal' } }],
    ['a plan without films', { film: { ...defaultFilmSettings, plan: { ...plan, exposures: [] } } }],
    ['a plan of 201 films', { film: { ...defaultFilmSettings, plan: { ...plan, exposures: new Array(201).fill(1) } } }],
    ['a revision of its readings', { readingsRevision: 7 }],
  ])('to %s is refused, and nothing is stored', async (_what, body) => {
    const made = await add.study(pairingId)
    const params = { shopId, studyId: made.id }
    expect((await owner.agent.refused(updateStudy, { params, version: 1, body })).code).toBe('validation-failed')
    expect(await owner.agent.ok(getStudy, { params })).toEqual(made)
  })
})

describe('the list of studies', () => {
  it('is filtered by state of work, printer, resin, pairing and lot, and searched by all names and the lot’s code', async () => {
    const pairing = await add.pairing()
    const lot = await add.lot(pairing.resinId, { code: '50%_lot' })
    const [open, paused] = [await add.study(pairing.id, { lotId: lot.id, layerHeightMicrometres: 30 }), await add.study(pairing.id, { layerHeightMicrometres: 100 })]
    await owner.agent.ok(updateStudy, { params: { shopId, studyId: paused.id }, version: 1, body: { state: 'paused' } })
    const ids = async (query: Record<string, string>) => (await owner.agent.ok(listStudies, { params: { shopId }, query: { sort: 'layerHeightMicrometres', ...query } })).items.map(item => item.id)
    expect(await ids({ pairingId: pairing.id })).toEqual([open.id, paused.id])
    expect(await ids({ printerId: pairing.printerId, sort: '-layerHeightMicrometres' })).toEqual([paused.id, open.id])
    expect(await ids({ resinId: pairing.resinId, work: 'paused' })).toEqual([paused.id])
    expect(await ids({ lotId: lot.id })).toEqual([open.id])
    expect(await ids({ q: '0%_L' })).toEqual([open.id])
    expect(await ids({ q: pairing.printerName.toUpperCase() })).toEqual([open.id, paused.id])
    expect(await ids({ pairingId: v7() })).toEqual([])
  })
})
