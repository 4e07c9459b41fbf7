import { v7 } from 'uuid'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { seedDemoShop } from '#db/seed/index.ts'
import { filmReading, pairing, printer, resin, study } from '#db/schema/index.ts'
import { getBench } from '#shared/contracts/bench.ts'
import { defaultFilmSettings } from '#shared/contracts/studies.ts'
import { fitWorkingCurve } from '#shared/film/index.ts'
import { hashPassword } from '#server/services/passwords.ts'
import { startTestApp } from '#tests/helpers/test-app.ts'

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
    const statements = async (of: typeof small): Promise<number> => {
      let count = 0
      const listen = () => void count++
      const { pool } = app
      const query = pool.query
      // Every statement of the app goes through the pool: count what one call sends.
      pool.query = ((...given: Parameters<typeof query>) => {
        listen()
        return query.apply(pool, given)
      }) as typeof query
      await of.owner.agent.ok(getBench, { params: { shopId: of.shopId } })
      pool.query = query
      return count
    }
    const [few, many] = [await statements(small), await statements(large)]
    expect(few).toBeGreaterThan(3)
    expect(many).toBe(few)
    expect((await large.owner.agent.ok(getBench, { params: { shopId: large.shopId } })).pairings.length).toBe(1000)
  })
})

async function fillShop(shopId: string, size: { printers: number; resins: number }) {
  const printers = Array.from({ length: size.printers }, (_, i) => ({
    id: v7(), shopId, name: `Printer ${i}`, lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 50, plateWidthMillimetres: 120, plateDepthMillimetres: 70,
    exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60,
  }))
  const resins = Array.from({ length: size.resins }, (_, i) => ({ id: v7(), shopId, name: `Resin ${i}` }))
  const pairings = printers.flatMap(p => resins.map(r => ({ id: v7(), shopId, printerId: p.id, resinId: r.id })))
  const studies = pairings.map((pair, i) => ({ id: v7(), shopId, pairingId: pair.id, name: `Study ${i}`, layerHeightMicrometres: 50, film: defaultFilmSettings }))
  await app.database.insert(printer).values(printers)
  await app.database.insert(resin).values(resins)
  await app.database.insert(pairing).values(pairings)
  await app.database.insert(study).values(studies)
  return { studyIds: studies.map(item => item.id) }
}
