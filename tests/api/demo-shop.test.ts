import { readFileSync } from 'node:fs'
import { pino } from 'pino'
import { v7 } from 'uuid'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { eq } from 'drizzle-orm'
import { demoPeople, seedDemoShop } from '#db/seed/index.ts'
import { filmReading, importBatch, lot, membership, pairing, printer, resin, shop, study, user } from '#db/schema/index.ts'
import { lotSchema } from '#shared/contracts/resins.ts'
import { emailSchema, newPasswordSchema, roles } from '#shared/contracts/common.ts'
import { newPrinterSchema } from '#shared/contracts/printers.ts'
import { filmReadingSaveSchema } from '#shared/contracts/film.ts'
import { filmSettingsSchema } from '#shared/contracts/studies.ts'
import { fitWorkingCurve } from '#shared/film/index.ts'
import { guessFilmImportMapping, readFilmRow } from '#shared/imports/index.ts'
import { benchSchema } from '#shared/contracts/bench.ts'
import { benchOf } from '#server/services/bench.ts'
import { createTestDatabase, type TestDatabase } from '#tests/helpers/test-database.ts'

const now = new Date('2026-03-10T09:00:00Z')
let test: TestDatabase

const seed = () => seedDemoShop(test.database, { clock: () => now, newId: () => v7(), hashPassword: async password => `hash of ${password}` })
beforeAll(async () => {
  test = await createTestDatabase()
  await Promise.all([seed(), seed(), seed(), seed()])
})
afterAll(() => test.drop())

const filmsOf = async (name: string) => {
  const rows = await test.database.select({ reading: filmReading, study }).from(filmReading).innerJoin(study, eq(study.id, filmReading.studyId)).where(eq(study.name, name))
  return rows.map(row => row.reading)
}
const fitOf = async (name: string) => fitWorkingCurve({
  readings: (await filmsOf(name)).map(reading => ({ exposure: reading.exposure, depthMicrometres: reading.depthMicrometres ?? 0, state: reading.state })),
  exposureKind: 'seconds', weighting: 'equal', confidenceLevel: 0.95,
})

describe('the demo shop', () => {
  it('is made once, whole, by four servers that start together and by a later start', async () => {
    expect(await seed()).toEqual(demoPeople)
    expect(await test.database.$count(shop)).toBe(1)
    expect(await test.database.$count(study)).toBe(5)
    expect(await test.database.$count(membership)).toBe(5)
  })

  it('has a person of every role who can sign in under the rules that hold for everybody', async () => {
    expect(demoPeople.map(person => person.role).toSorted()).toEqual([...roles].toSorted())
    for (const person of demoPeople) {
      expect(emailSchema.parse(person.email)).toBe(person.email)
      expect(person.email).toMatch(/\.example$/)
      newPasswordSchema.parse(person.password)
    }
    const stored = await test.database.select({ email: user.email, passwordHash: user.passwordHash, role: membership.role }).from(membership).innerJoin(user, eq(user.id, membership.userId))
    expect(stored.toSorted((a, b) => a.email.localeCompare(b.email))).toEqual(
      demoPeople.map(({ email, password, role }) => ({ email, passwordHash: `hash of ${password}`, role })).toSorted((a, b) => a.email.localeCompare(b.email)))
  })

  it('holds only what people could have entered themselves', async () => {
    for (const row of await test.database.select().from(printer)) newPrinterSchema.strip().parse(row)
    for (const row of await test.database.select().from(study)) filmSettingsSchema.parse(row.film)
    for (const row of await test.database.select().from(filmReading)) filmReadingSaveSchema.parse(saveOf(row))
    for (const row of await test.database.select({ lot, resin }).from(lot).innerJoin(resin, eq(resin.id, lot.resinId))) {
      lotSchema.parse({ ...row.lot, resinName: row.resin.name, createdAt: now.toISOString(), updatedAt: now.toISOString(), retiredAt: null })
    }
  })

  it('has a lot that expires within ten days of its making, and a pairing without a study', async () => {
    const lots = await test.database.select({ expiresOn: lot.expiresOn }).from(lot)
    expect(lots.filter(row => row.expiresOn === '2026-03-19')).toHaveLength(1)
    expect(await test.database.$count(pairing)).toBe(6)
  })

  it('has a clean film study whose fit finds the truth without a finding', async () => {
    const fit = await fitOf('Everyday grey at 50 µm')
    expect(fit).toMatchObject({ kind: 'fitted', findings: [], filmCount: 12 })
    if (fit.kind !== 'fitted' || fit.penetrationDepthMicrometres.interval.kind !== 'finite') throw new Error('no interval')
    // 160 µm: fixtures/data/README.md
    expect(fit.penetrationDepthMicrometres.interval.lower).toBeLessThan(160)
    expect(fit.penetrationDepthMicrometres.interval.upper).toBeGreaterThan(160)
  })

  it('has a study that bends, one with an odd film, and says so', async () => {
    for (const [name, code] of [['Window clear, radiant exposure', 'curvature'], ['Tough amber at 100 µm', 'outlier']] as const) {
      const fit = await fitOf(name)
      expect(fit.kind === 'fitted' && fit.findings.map(finding => finding.code)).toContain(code)
    }
  })

  it('has a study half done whose plan has films that nobody measured', async () => {
    const films = await filmsOf('Model sand at 25 µm')
    const [row] = await test.database.select({ film: study.film }).from(study).where(eq(study.name, 'Model sand at 25 µm'))
    const planned = [...(filmSettingsSchema.parse(row?.film).plan?.exposures ?? [])]
    for (const film of films) {
      expect(planned).toContain(film.exposure)
      planned.splice(planned.indexOf(film.exposure), 1)
    }
    expect(planned).toHaveLength(3)
    // The second films of two exposures are still to come, and the bench says so.
    const [shopRow] = await test.database.select({ id: shop.id }).from(shop)
    const { pairings, attention } = benchSchema.parse(await benchOf({ database: test.database, clock: () => now, logger: pino({ level: 'silent' }) }, { userId: v7(), displayName: '', email: '', role: 'owner', shopId: shopRow?.id ?? '' }))
    const summary = pairings.flatMap(shown => shown.studies).find(shown => shown.name === 'Model sand at 25 µm')
    expect(summary).toMatchObject({ filmsMeasured: 4, filmsPlanned: 3 })
    expect(attention.map(item => item.kind)).toEqual(expect.arrayContaining(['films-to-measure', 'film-fit-doubtful', 'lot-expires-soon', 'no-study-yet']))
  })

  it('has the films of fixtures/data/south-bench-films.csv, as its import would have read them', async () => {
    const rows = readFileSync(new URL('../../fixtures/data/south-bench-films.csv', import.meta.url), 'utf8').trim().split('\r\n').map(line => line.split(';'))
    const { mapping } = guessFilmImportMapping({ rows, encoding: 'utf-8', delimiter: ';' }, 'seconds')
    if (mapping === null) throw new Error('no mapping was guessed')
    const outcomes = rows.slice(1).map((cells, i) => readFilmRow(cells, i + 2, mapping))
    const read = outcomes.flatMap(outcome => (outcome.kind === 'reading' ? [[outcome.exposure, outcome.exposureText, outcome.depthMicrometres, outcome.depthText]] : []))
    const stored = (await filmsOf('Everyday grey on the south bench')).toSorted((a, b) => a.exposure - b.exposure || a.replicate - b.replicate)
    expect(stored.map(film => [film.exposure, film.exposureText, film.depthMicrometres, film.depthText])).toEqual(read)
    const [batch] = await test.database.select().from(importBatch)
    expect(batch).toMatchObject({ mapping, acceptedRows: read.length, rejectedRows: 1 })
    expect(batch?.rejected).toMatchObject(outcomes.flatMap(outcome => (outcome.kind === 'rejected' ? [{ line: outcome.line, cells: outcome.cells, reasons: outcome.reasons }] : [])))
  })

  it('has one resin on two printers', async () => {
    const [north, south] = [await fitOf('Everyday grey at 50 µm'), await fitOf('Everyday grey on the south bench')]
    if (north.kind !== 'fitted' || south.kind !== 'fitted') throw new Error('not fitted')
    // Truth 1.35.
    expect(south.criticalExposure.value / north.criticalExposure.value).toBeCloseTo(1.35, 1)
  })
})

function saveOf(row: typeof filmReading.$inferSelect) {
  const { id, exposure, exposureText, replicate, depthMicrometres, depthText, standardUncertaintyMicrometres, state, exclusionReason, note } = row
  return { id, exposure, exposureText, replicate, depthMicrometres, depthText, standardUncertaintyMicrometres, state, exclusionReason, note, baseVersion: null, withdrawn: false }
}
