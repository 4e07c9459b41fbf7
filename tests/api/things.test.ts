import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { lot, pairing, printer } from '#db/schema/index.ts'
import type { Operation } from '#shared/contracts/operation.ts'
import * as pairings from '#shared/contracts/pairings.ts'
import * as printers from '#shared/contracts/printers.ts'
import * as resins from '#shared/contracts/resins.ts'
import * as studies from '#shared/contracts/studies.ts'
import { startTestApp, type TestMember } from '#tests/helpers/test-app.ts'

const newPrinter = {
  name: 'North', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 50, plateWidthMillimetres: 120, plateDepthMillimetres: 70,
  exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60, irradianceMilliwattsPerSquareCentimetre: null, notes: '',
}
const newResin = { name: 'Grey', description: '', notes: '' }

let app: Awaited<ReturnType<typeof startTestApp>>
let owner: TestMember
let shopId: string

beforeAll(async () => {
  app = await startTestApp()
  ;({ owner, shopId } = await app.makeShop())
})
afterAll(() => app.close())

let count = 0
const addPrinter = async (change: Partial<typeof newPrinter> = {}, by = owner, inShop = shopId) =>
  by.agent.ok(printers.createPrinter, { params: { shopId: inShop }, body: { ...newPrinter, name: `Printer ${++count}`, ...change } })
const addResin = async (change: Partial<typeof newResin> = {}, by = owner, inShop = shopId) =>
  by.agent.ok(resins.createResin, { params: { shopId: inShop }, body: { ...newResin, name: `Resin ${++count}`, ...change } })
const codeOf = (answer: { body: unknown }): unknown => (typeof answer.body === 'object' && answer.body !== null && 'code' in answer.body ? answer.body.code : null)

describe('a printer', () => {
  it('is created, read, changed and audited with who and what', async () => {
    const made = await addPrinter()
    expect(made.version).toBe(1)
    const params = { shopId, printerId: made.id }
    const changed = await owner.agent.ok(printers.updatePrinter, { params, version: 1, body: { notes: 'new film' } })
    expect(changed).toMatchObject({ version: 2, notes: 'new film', name: made.name })
    expect(await owner.agent.ok(printers.getPrinter, { params })).toEqual(changed)
    const { rows } = await app.pool.query('select action, actor_user_id, before, after from audit_event where thing_id = $1 order by at', [made.id])
    expect(rows.map(row => [row.action, row.actor_user_id, row.before?.notes, row.after?.notes])).toEqual([
      ['created', owner.userId, undefined, ''],
      ['changed', owner.userId, '', 'new film'],
    ])
  })

  it('edited on a stale copy is refused with the thing as it stands, and nothing is overwritten', async () => {
    const made = await addPrinter()
    const params = { shopId, printerId: made.id }
    await owner.agent.ok(printers.updatePrinter, { params, version: 1, body: { notes: 'first' } })
    const answer = await owner.agent.call(printers.updatePrinter, { params, version: 1, body: { notes: 'second' } })
    expect(answer.status).toBe(412)
    expect(answer.body).toMatchObject({ code: 'stale-edit', current: { version: 2, notes: 'first' } })
    expect((await owner.agent.ok(printers.getPrinter, { params })).notes).toBe('first')
  })

  it('edited by twenty people at once is changed by exactly one of them', async () => {
    const made = await addPrinter()
    const params = { shopId, printerId: made.id }
    const answers = await Promise.all(Array.from({ length: 20 }, (_, i) => owner.agent.call(printers.updatePrinter, { params, version: 1, body: { notes: `person ${i}` } })))
    expect(answers.map(answer => answer.status).sort()).toEqual([200, ...new Array<number>(19).fill(412)])
    expect((await owner.agent.ok(printers.getPrinter, { params })).version).toBe(2)
  })

  it('asks for If-Match instead of overwriting blindly', async () => {
    const made = await addPrinter()
    const answer = await owner.agent.call(printers.updatePrinter, { params: { shopId, printerId: made.id }, body: { notes: 'x' } })
    expect([answer.status, codeOf(answer)]).toEqual([428, 'if-match-required'])
  })

  it('keeps its name to itself while in use, whatever the case; a retired one gives it free', async () => {
    const made = await addPrinter({ name: 'The only one' })
    const second = await owner.agent.call(printers.createPrinter, { params: { shopId }, body: { ...newPrinter, name: 'the ONLY one' } })
    expect(second.status).toBe(409)
    expect(second.body).toMatchObject({ code: 'name-taken', fields: [{ path: 'body.name' }] })
    const retired = await owner.agent.ok(printers.retirePrinter, { params: { shopId, printerId: made.id }, version: 1 })
    expect(retired.retiredAt).not.toBeNull()
    await addPrinter({ name: 'the ONLY one' })
    const back = await owner.agent.call(printers.restorePrinter, { params: { shopId, printerId: made.id }, version: 2 })
    expect([back.status, codeOf(back)]).toEqual([409, 'name-taken'])
  })

  it.each([
    ['wavelength below 200 nm', { lightEngineWavelengthNanometres: 199.9 }],
    ['wavelength above 800 nm', { lightEngineWavelengthNanometres: 800.1 }],
    ['step of zero', { exposureStepSeconds: 0 }],
    ['negative pixel', { pixelSizeMicrometres: -50 }],
    ['1e308', { plateWidthMillimetres: 1e308 }],
    ['longest below shortest', { exposureSecondsMin: 5, exposureSecondsMax: 4 }],
    ['empty name', { name: '   ' }],
    ['name of 121 characters', { name: 'x'.repeat(121) }],
    ['unknown field', { shopId: 'of another' }],
    ['version set by the caller', { version: 99 }],
    ['zero byte in the notes', { notes: 'a\u0000b' }],
  ])('refuses %s with a sentence and makes nothing', async (_name, change) => {
    const before = await app.database.$count(printer)
    const answer = await owner.agent.call(printers.createPrinter, { params: { shopId }, body: { ...newPrinter, name: `P ${++count}`, ...change } })
    expect([answer.status, codeOf(answer)]).toEqual([422, 'validation-failed'])
    expect(await app.database.$count(printer)).toBe(before)
  })

  it.each([['200 nm', { lightEngineWavelengthNanometres: 200 }], ['800 nm', { lightEngineWavelengthNanometres: 800 }], ['120 characters', { name: 'y'.repeat(120) }]])(
    'takes the limit itself: %s', async (_name, change) => {
      await expect(addPrinter(change)).resolves.toMatchObject(change)
    })

  it('checks the order of the range against what is stored when only one end is changed', async () => {
    const made = await addPrinter({ exposureSecondsMin: 1, exposureSecondsMax: 10 })
    const answer = await owner.agent.call(printers.updatePrinter, { params: { shopId, printerId: made.id }, version: 1, body: { exposureSecondsMax: 1 } })
    expect([answer.status, codeOf(answer)]).toEqual([422, 'validation-failed'])
  })
})

describe('a retried create', () => {
  it('answers the first answer and makes one thing, also when both arrive at once', async () => {
    const body = { ...newPrinter, name: 'Retried' }
    const answers = await Promise.all([1, 2, 3].map(() => owner.agent.call(printers.createPrinter, { params: { shopId }, body, key: 'key-1' })))
    expect(answers.map(answer => answer.status)).toEqual([201, 201, 201])
    expect(new Set(answers.map(answer => JSON.stringify(answer.body))).size).toBe(1)
    const list = await owner.agent.ok(printers.listPrinters, { params: { shopId }, query: { q: 'Retried' } })
    expect(list.total).toBe(1)
  })

  it('with a key that came with another request is refused', async () => {
    await owner.agent.ok(printers.createPrinter, { params: { shopId }, body: { ...newPrinter, name: 'Once' }, key: 'key-2' })
    const other = await owner.agent.call(printers.createPrinter, { params: { shopId }, body: { ...newPrinter, name: 'Twice' }, key: 'key-2' })
    expect([other.status, codeOf(other)]).toEqual([409, 'idempotency-key-reused'])
  })

  it('that was refused leaves the key free', async () => {
    const bad = await owner.agent.call(printers.createPrinter, { params: { shopId }, body: { ...newPrinter, name: 'Once' }, key: 'key-3' })
    expect(codeOf(bad)).toBe('name-taken')
    await owner.agent.ok(printers.createPrinter, { params: { shopId }, body: { ...newPrinter, name: 'Free again' }, key: 'key-3' })
  })
})

describe('a list', () => {
  let other: Awaited<ReturnType<typeof app.makeShop>>
  beforeAll(async () => {
    other = await app.makeShop('Many')
    for (let i = 0; i < 137; i++) {
      await other.owner.agent.ok(resins.createResin, { params: { shopId: other.shopId }, body: { ...newResin, name: `Shade ${i}`, description: i % 3 === 0 ? 'clear' : '100% grey_filled' } })
    }
    // Everything changed at one moment: a sort by time alone could lose or double rows at the page's edge.
    await app.pool.query(`update resin set updated_at = '2026-01-01T00:00:00Z' where shop_id = $1`, [other.shopId])
  })

  it.each(['name', '-name', 'updatedAt', '-updatedAt'])('walks 137 resins in pages of 10 by %s, each once', async sort => {
    const seen: string[] = []
    let cursor: string | undefined
    do {
      const page = await other.owner.agent.ok(resins.listResins, { params: { shopId: other.shopId }, query: { limit: 10, sort, ...(cursor === undefined ? {} : { cursor }) } })
      expect(page.total).toBe(137)
      seen.push(...page.items.map(item => item.id))
      cursor = page.nextCursor ?? undefined
    } while (cursor !== undefined)
    expect(seen.length).toBe(137)
    expect(new Set(seen).size).toBe(137)
  })

  it.each([['%', 91], ['_filled', 91], ['clear', 46], ['CLEAR', 46], ['shade 136', 1], ["'; drop table resin; --", 0], ['\\', 0]])(
    'takes the search %s by the letter', async (q, total) => {
      expect((await other.owner.agent.ok(resins.listResins, { params: { shopId: other.shopId }, query: { q } })).total).toBe(total)
    })

  it.each(['nonsense', Buffer.from('["a"]').toString('base64url'), Buffer.from('["a","not an id"]').toString('base64url')])(
    'refuses the cursor %s', async cursor => {
      const answer = await other.owner.agent.call(resins.listResins, { params: { shopId: other.shopId }, query: { cursor } })
      expect([answer.status, codeOf(answer)]).toEqual([400, 'bad-request'])
    })

  it('shows nothing of another shop', async () => {
    expect((await owner.agent.ok(resins.listResins, { params: { shopId }, query: { q: 'Shade' } })).total).toBe(0)
  })
})

describe('things that belong together', () => {
  it('a lot needs a resin of its own shop', async () => {
    const foreign = await app.makeShop('Foreign')
    const theirs = await addResin({}, foreign.owner, foreign.shopId)
    const body = { code: 'L1', resinId: theirs.id, receivedOn: null, openedOn: null, expiresOn: '2027-01-31', notes: '' }
    const answer = await owner.agent.call(resins.createLot, { params: { shopId }, body })
    expect([answer.status, codeOf(answer)]).toEqual([422, 'validation-failed'])
    // The database refuses it too, should a service ever forget.
    await expect(app.database.insert(lot).values({ id: theirs.id, shopId, resinId: theirs.id, code: 'L1' })).rejects.toThrow()
  })

  it('a pairing of two shops is impossible, for the service and for the database', async () => {
    const foreign = await app.makeShop('Foreign too')
    const theirs = await addPrinter({}, foreign.owner, foreign.shopId)
    const ours = await addResin()
    const answer = await owner.agent.call(pairings.createPairing, { params: { shopId }, body: { printerId: theirs.id, resinId: ours.id } })
    expect([answer.status, codeOf(answer)]).toEqual([422, 'validation-failed'])
    await expect(app.database.insert(pairing).values({ id: ours.id, shopId, printerId: theirs.id, resinId: ours.id })).rejects.toThrow()
  })

  it('pairing twice answers the one pairing, and brings a retired one back', async () => {
    const [p, r] = [await addPrinter(), await addResin()]
    const body = { printerId: p.id, resinId: r.id }
    const first = await owner.agent.ok(pairings.createPairing, { params: { shopId }, body })
    expect((await owner.agent.ok(pairings.createPairing, { params: { shopId }, body })).id).toBe(first.id)
    await owner.agent.ok(pairings.retirePairing, { params: { shopId, pairingId: first.id }, version: 1 })
    expect(await owner.agent.ok(pairings.createPairing, { params: { shopId }, body })).toMatchObject({ id: first.id, retiredAt: null })
  })

  it('a study takes a lot of its own resin only', async () => {
    const [p, r, otherResin] = [await addPrinter(), await addResin(), await addResin()]
    const pair = await owner.agent.ok(pairings.createPairing, { params: { shopId }, body: { printerId: p.id, resinId: r.id } })
    const lotOf = (resinId: string, code: string) =>
      owner.agent.ok(resins.createLot, { params: { shopId }, body: { code, resinId, receivedOn: null, openedOn: null, expiresOn: null, notes: '' } })
    const [right, wrong] = [await lotOf(r.id, 'R'), await lotOf(otherResin.id, 'W')]
    const body = { pairingId: pair.id, lotId: wrong.id, name: 'S', layerHeightMicrometres: 50, resinTemperatureCelsius: 24, notes: '', exposureKind: 'seconds' }
    expect(codeOf(await owner.agent.call(studies.createStudy, { params: { shopId }, body }))).toBe('validation-failed')
    const made = await owner.agent.ok(studies.createStudy, { params: { shopId }, body: { ...body, lotId: right.id } })
    expect(made).toMatchObject({ lotCode: 'R', printerName: p.name, resinName: r.name, state: 'open', filmReadingCount: 0 })
    const params = { shopId, studyId: made.id }
    expect(codeOf(await owner.agent.call(studies.updateStudy, { params, version: 1, body: { lotId: wrong.id } }))).toBe('validation-failed')
    const film = { ...made.film, layerRule: 'constant-ratio' as const, depthRatio: 1.8 }
    expect((await owner.agent.ok(studies.updateStudy, { params, version: 1, body: { film, state: 'paused' } })).film).toEqual(film)
    const filtered = await owner.agent.ok(studies.listStudies, { params: { shopId }, query: { work: 'paused', lotId: right.id, printerId: p.id, sort: '-layerHeightMicrometres' } })
    expect(filtered.items.map(item => item.id)).toEqual([made.id])
  })
})

describe('another shop', () => {
  it.each<[string, Operation]>([['get', printers.getPrinter], ['update', printers.updatePrinter], ['retire', printers.retirePrinter]])('cannot %s our printer through its own address', async (_name, operation) => {
    const made = await addPrinter()
    const foreign = await app.makeShop('Thieves')
    const answer = await foreign.owner.agent.call(operation, { params: { shopId: foreign.shopId, printerId: made.id }, version: 1, ...(operation.method === 'patch' ? { body: { notes: 'ours now' } } : {}) })
    expect([answer.status, codeOf(answer)]).toEqual([404, 'not-found'])
    expect((await owner.agent.ok(printers.getPrinter, { params: { shopId, printerId: made.id } })).notes).toBe('')
  })
})
