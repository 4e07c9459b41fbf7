import { v7 } from 'uuid'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { eq } from 'drizzle-orm'
import { seedDemoShop } from '#db/seed/index.ts'
import { filmReading, fit, pairing, printer, resin, study } from '#db/schema/index.ts'
import { getBench, type BenchStudy } from '#shared/contracts/bench.ts'
import { saveFilmReadings } from '#shared/contracts/film.ts'
import { retirePairing } from '#shared/contracts/pairings.ts'
import { retirePrinter, updatePrinter } from '#shared/contracts/printers.ts'
import { createLot } from '#shared/contracts/resins.ts'
import { defaultFilmSettings, getStudy, updateStudy } from '#shared/contracts/studies.ts'
import { fitDeadTimeCurve, fitWorkingCurve, modelExposureForDepth } from '#shared/film/index.ts'
import { hashPassword } from '#server/services/passwords.ts'
import { cell } from '#tests/helpers/film-shop.ts'
import { startTestApp, type TestMember } from '#tests/helpers/test-app.ts'

let app: Awaited<ReturnType<typeof startTestApp>>
beforeAll(async () => {
  app = await startTestApp()
})
afterAll(() => app.close())

describe('the bench', () => {
  it('of a new shop is empty and waits for nothing', async () => {
    const { shopId, owner } = await app.makeShop()
    expect(await owner.agent.ok(getBench, { params: { shopId } })).toEqual({ printers: [], resins: [], pairings: [], attention: [] })
  })

  it('of the demo shop shows what is known, what is doubtful and what waits', async () => {
    const people = await seedDemoShop(app.database, { clock: app.clock.now, newId: v7, hashPassword })
    const owner = people.find(person => person.role === 'owner')
    const agent = app.visitor()
    const session = await agent.signIn(owner?.email ?? '', owner?.password ?? '')
    const bench = await agent.ok(getBench, { params: { shopId: session.memberships[0]?.shopId ?? '' } })
    const kinds = bench.attention.map(item => item.kind)
    expect(kinds).toContain('films-to-measure')
    expect(kinds).toContain('film-fit-doubtful')
    // Most urgent first.
    expect(kinds.indexOf('films-to-measure')).toBeLessThan(kinds.indexOf('no-study-yet'))
    const studies = bench.pairings.flatMap(item => item.studies)
    expect(studies.every(item => item.film.kind === 'fitted')).toBe(true)
  })

  it('sums a study up with the same numbers as the film model', async () => {
    const { shopId, owner } = await app.makeShop()
    const ids = await fillShop(shopId, { printers: 1, resins: 1 })
    const depths = [40, 78, 101, 142, 161]
    const exposures = [1, 1.5, 2, 3, 4]
    await app.database.insert(filmReading).values(exposures.map((exposure, i) => ({
      id: v7(), shopId, studyId: ids.studyIds[0] ?? '', exposure, exposureText: '', replicate: 1, depthMicrometres: depths[i] ?? 0, depthText: '', state: 'measured' as const,
    })))
    const [summary] = (await owner.agent.ok(getBench, { params: { shopId } })).pairings[0]?.studies ?? []
    const fit = fitWorkingCurve({ exposureKind: 'seconds', readings: exposures.map((exposure, i) => ({ exposure, depthMicrometres: depths[i] ?? 0, state: 'measured' })) })
    if (fit.kind !== 'fitted' || summary?.film.kind !== 'fitted') throw new Error('both must fit')
    expect(summary.film.penetrationDepthMicrometres.value).toBe(fit.penetrationDepthMicrometres.value)
    expect(summary.film.criticalExposure.interval).toEqual(fit.criticalExposure.interval)
  })

  it('of 50 printers and 50 resins with 1000 studies takes as many statements as that of one', async () => {
    const small = await app.makeShop('Small')
    await fillShop(small.shopId, { printers: 1, resins: 1 })
    const large = await app.makeShop('Large')
    await fillShop(large.shopId, { printers: 50, resins: 20 })
    const statements = async (of: typeof small) => (await statementsOf(() => of.owner.agent.ok(getBench, { params: { shopId: of.shopId } }))).texts.length
    const [few, many] = [await statements(small), await statements(large)]
    expect(few).toBeGreaterThan(3)
    expect(many).toBe(few)
    expect((await large.owner.agent.ok(getBench, { params: { shopId: large.shopId } })).pairings.length).toBe(1000)
  })

  it('answers with the curve that the person accepted, on the printer’s step', async () => {
    const { shopId, owner } = await app.makeShop()
    const { studyIds } = await fillShop(shopId, { printers: 1, resins: 1 })
    await addFilms(shopId, studyIds[0], filmsWithDeadTime)
    const before = await onlyStudy(owner)
    const study = await owner.agent.ok(getStudy, { params: { shopId, studyId: studyIds[0] ?? '' } })
    await owner.agent.ok(updateStudy, { params: { shopId, studyId: study.id }, version: 1, body: { film: { ...study.film, model: 'dead-time' } } })
    const after = await onlyStudy(owner)
    const own = fitDeadTimeCurve({ exposureKind: 'seconds', readings: filmsWithDeadTime.map(film => ({ ...film, state: 'measured' })) })
    const answer = own.kind === 'fitted' ? modelExposureForDepth(own, 100) : null
    if (answer?.kind !== 'answered' || before.film.kind !== 'fitted' || after.film.kind !== 'fitted') throw new Error('all must fit')
    expect(after.film.exposureForLayer.value).toBe(answer.value)
    expect(after.film.exposureForLayer.value).not.toBe(before.film.exposureForLayer.value)
    expect(after.film.exposureOnStepSeconds).toBe(Math.round(answer.value * 10) / 10)
  })

  it('turns a dose into the printer’s seconds where its irradiance is known', async () => {
    const { shopId, owner } = await app.makeShop()
    const { studyIds, printerIds } = await fillShop(shopId, { printers: 1, resins: 1 }, { exposureKind: 'mJ/cm2' })
    await addFilms(shopId, studyIds[0], filmsWithDeadTime)
    const unknown = await onlyStudy(owner)
    if (unknown.film.kind !== 'fitted') throw new Error('must fit')
    expect(unknown.film.exposureOnStepSeconds).toBeNull()
    await owner.agent.ok(updatePrinter, { params: { shopId, printerId: printerIds[0] ?? '' }, version: 1, body: { irradianceMilliwattsPerSquareCentimetre: 0.5 } })
    const known = await onlyStudy(owner)
    if (known.film.kind !== 'fitted') throw new Error('must fit')
    expect(known.film.exposureOnStepSeconds).toBe(Math.round((unknown.film.exposureForLayer.value / 0.5) * 10) / 10)
  })

  it('reads no readings again until readings, settings or the printer change, and never shows an old sum', async () => {
    const { shopId, owner } = await app.makeShop()
    const { studyIds, printerIds } = await fillShop(shopId, { printers: 1, resins: 1 })
    const params = { shopId, studyId: studyIds[0] ?? '' }
    await owner.agent.ok(saveFilmReadings, { params, body: { readings: filmsWithDeadTime.map(film => cell(film)) } })
    const asked = async () => {
      const seen = await statementsOf(() => onlyStudy(owner))
      return { readings: seen.texts.some(text => text.includes('film_reading')), film: seen.answer.film, measured: seen.answer.filmsMeasured }
    }
    const first = await asked()
    expect(first).toMatchObject({ readings: true, measured: 7 })
    expect(await asked()).toEqual({ ...first, readings: false })

    await owner.agent.ok(saveFilmReadings, { params, body: { readings: [cell({ exposure: 20, depthMicrometres: 350 })] } })
    const second = await asked()
    expect(second).toMatchObject({ readings: true, measured: 8 })
    expect(second.film).not.toEqual(first.film)

    await owner.agent.ok(updateStudy, { params, version: 1, body: { layerHeightMicrometres: 30 } })
    const third = await asked()
    expect(third.readings).toBe(true)
    expect(third.film).not.toEqual(second.film)
    await owner.agent.ok(updateStudy, { params, version: 2, body: { notes: 'no number in it' } })
    expect(await asked()).toEqual({ ...third, readings: false })

    await owner.agent.ok(updatePrinter, { params: { shopId, printerId: printerIds[0] ?? '' }, version: 1, body: { exposureStepSeconds: 0.5 } })
    expect((await asked()).film).not.toEqual(third.film)
    expect(await app.database.$count(fit, eq(fit.shopId, shopId))).toBe(1)

    // A sum of an older release is made anew.
    await app.pool.query(`update fit set library_version = 'film-0/bench-0' where shop_id = $1`, [shopId])
    expect((await asked()).readings).toBe(true)
  })

  it('read by twelve people at once before anything is kept is the same for all', async () => {
    const { shopId, owner } = await app.makeShop()
    const { studyIds } = await fillShop(shopId, { printers: 3, resins: 5 })
    for (const id of studyIds) await addFilms(shopId, id, filmsWithDeadTime)
    const benches = await Promise.all(Array.from({ length: 12 }, () => owner.agent.ok(getBench, { params: { shopId } })))
    expect(new Set(benches.map(bench => JSON.stringify(bench))).size).toBe(1)
    expect(await owner.agent.ok(getBench, { params: { shopId } })).toEqual(benches[0])
  })

  it('is not taken from the others by a study with odd numbers', async () => {
    const { shopId, owner } = await app.makeShop()
    const { studyIds } = await fillShop(shopId, { printers: 1, resins: 4 })
    await addFilms(shopId, studyIds[0], filmsWithDeadTime)
    // Depths that hardly rise: the exposure for the layer is beyond every number.
    await addFilms(shopId, studyIds[1], [1, 2, 4].map((exposure, i) => ({ exposure, depthMicrometres: 1 + i * 0.05 })))
    await addFilms(shopId, studyIds[2], [{ exposure: 1e9, depthMicrometres: 1e5 }, { exposure: 1e-9, depthMicrometres: -1e5 }, { exposure: 2, depthMicrometres: 3 }])
    await addFilms(shopId, studyIds[3], [{ exposure: 2, depthMicrometres: 100 }])
    const studies = (await owner.agent.ok(getBench, { params: { shopId } })).pairings.flatMap(item => item.studies)
    const filmOf = (i: number) => studies.find(item => item.id === studyIds[i])?.film
    expect(filmOf(0)?.kind).toBe('fitted')
    expect(filmOf(1)).toMatchObject({ kind: 'refused', detail: 'The films give no usable exposure for 50 µm layers. Check their exposures and thicknesses.' })
    expect(['fitted', 'refused']).toContain(filmOf(2)?.kind)
    expect(filmOf(3)?.kind).toBe('refused')
    const { attention } = await owner.agent.ok(getBench, { params: { shopId } })
    expect(attention.find(item => item.studyId === studyIds[1])?.kind).toBe('film-fit-doubtful')
    // One film is a start, no doubt: the next films are asked for.
    expect(attention.find(item => item.studyId === studyIds[3])?.kind).toBe('films-to-print')
  })

  it('says of a retired printer, resin or pairing that an open study still rests on it, and shows neither in the grid', async () => {
    const { shopId, owner } = await app.makeShop()
    const { pairingIds, printerIds } = await fillShop(shopId, { printers: 2, resins: 2 })
    await owner.agent.ok(retirePrinter, { params: { shopId, printerId: printerIds[0] ?? '' }, version: 1 })
    await owner.agent.ok(retirePairing, { params: { shopId, pairingId: pairingIds[2] ?? '' }, version: 1 })
    const bench = await owner.agent.ok(getBench, { params: { shopId } })
    expect(bench.printers.map(item => item.name)).toEqual(['Printer 1'])
    expect(bench.pairings.map(item => item.id)).toEqual([pairingIds[3]])
    expect(bench.attention.filter(item => item.kind === 'rests-on-retired').map(item => item.sentence)).toEqual([
      'Study 0: Printer 0 is retired while this study is open. Restore it, or decide, pause or retire the study.',
      'Study 1: Printer 0 is retired while this study is open. Restore it, or decide, pause or retire the study.',
      'Study 2: Printer 1 with Resin 0 is retired while this study is open. Restore it, or decide, pause or retire the study.',
    ])
    await app.pool.query(`update study set state = 'decided' where shop_id = $1`, [shopId])
    expect((await owner.agent.ok(getBench, { params: { shopId } })).attention).toEqual([])
  })

  it.each([
    [-2, 'lot-expired', 'expired 2 days ago. Finish with a lot in date.'], [-1, 'lot-expired', 'expired 1 day ago. Finish with a lot in date.'],
    [0, 'lot-expires-soon', 'expires today.'], [1, 'lot-expires-soon', 'expires in 1 day.'], [30, 'lot-expires-soon', 'expires in 30 days.'], [31, null, ''],
  ])('of a lot whose last day is %i days ahead says %s', async (ahead, kind, words) => {
    const { shopId, owner } = await app.makeShop()
    const { studyIds, resinIds } = await fillShop(shopId, { printers: 1, resins: 1 })
    const expiresOn = new Date(app.clock.now().getTime() + ahead * 86_400_000).toISOString().slice(0, 10)
    const made = await owner.agent.ok(createLot, { params: { shopId }, body: { code: 'L-7', resinId: resinIds[0] ?? '', receivedOn: null, openedOn: null, expiresOn, notes: '' } })
    await owner.agent.ok(updateStudy, { params: { shopId, studyId: studyIds[0] ?? '' }, version: 1, body: { lotId: made.id } })
    const { attention } = await owner.agent.ok(getBench, { params: { shopId } })
    const ofLot = attention.filter(item => item.kind.startsWith('lot-'))
    expect(ofLot.map(({ kind, sentence, lotId }) => ({ kind, sentence, lotId }))).toEqual(kind === null ? [] : [{ kind, sentence: `Study 0: lot L-7 ${words}`, lotId: made.id }])
  })
})

/** Made up: depth = 100 ln((t − 0.4)/0.6), scattered. */
const filmsWithDeadTime = [1.4, 1.8, 2.5, 3.5, 5, 8, 12].map((exposure, i) => ({ exposure, depthMicrometres: 100 * Math.log((exposure - 0.4) / 0.6) + ((i * 7) % 5) - 2 }))

async function onlyStudy({ agent, shopId }: TestMember): Promise<BenchStudy> {
  const [found] = (await agent.ok(getBench, { params: { shopId } })).pairings.flatMap(item => item.studies)
  if (found === undefined) throw new Error('no study on the bench')
  return found
}

async function addFilms(shopId: string, studyId: string | undefined, films: readonly { readonly exposure: number; readonly depthMicrometres: number }[]): Promise<void> {
  await app.database.insert(filmReading).values(films.map(film => ({
    id: v7(), shopId, studyId: studyId ?? '', exposureText: '', replicate: 1, depthText: '', state: 'measured' as const, ...film,
  })))
}

/** What a call sends to PostgreSQL through the pool. */
async function statementsOf<Answer>(call: () => Promise<Answer>): Promise<{ texts: string[]; answer: Answer }> {
  const texts: string[] = []
  const { pool } = app
  const query = pool.query
  pool.query = ((...given: Parameters<typeof query>) => {
    const first: unknown = given[0]
    texts.push(typeof first === 'object' && first !== null && 'text' in first ? String(first.text) : String(first))
    return query.apply(pool, given)
  }) as typeof query
  try {
    return { answer: await call(), texts }
  } finally {
    pool.query = query
  }
}

async function fillShop(shopId: string, size: { printers: number; resins: number }, change: { exposureKind?: 'mJ/cm2' } = {}) {
  const printers = Array.from({ length: size.printers }, (_, i) => ({
    id: v7(), shopId, name: `Printer ${i}`, lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 50, plateWidthMillimetres: 120, plateDepthMillimetres: 70,
    exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60,
  }))
  const resins = Array.from({ length: size.resins }, (_, i) => ({ id: v7(), shopId, name: `Resin ${i}` }))
  const pairings = printers.flatMap(p => resins.map(r => ({ id: v7(), shopId, printerId: p.id, resinId: r.id })))
  const studies = pairings.map((pair, i) => ({ id: v7(), shopId, pairingId: pair.id, name: `Study ${i}`, layerHeightMicrometres: 50, film: defaultFilmSettings, ...change }))
  await app.database.insert(printer).values(printers)
  await app.database.insert(resin).values(resins)
  await app.database.insert(pairing).values(pairings)
  await app.database.insert(study).values(studies)
  const ids = (rows: readonly { readonly id: string }[]) => rows.map(row => row.id)
  return { studyIds: ids(studies), pairingIds: ids(pairings), printerIds: ids(printers), resinIds: ids(resins) }
}
