import { and, eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { auditEvent, pairing } from '#db/schema/index.ts'
import { createPairing, listPairings, retirePairing, updatePairing } from '#shared/contracts/pairings.ts'
import { retirePrinter } from '#shared/contracts/printers.ts'
import { retireResin } from '#shared/contracts/resins.ts'
import { startTestApp, type TestApp, type TestMember } from '#tests/helpers/test-app.ts'
import { thingsBy } from '#tests/helpers/thing-shop.ts'

let app: TestApp
let owner: TestMember
let shopId: string
let add: ReturnType<typeof thingsBy>

beforeAll(async () => {
  app = await startTestApp()
  ;({ owner, shopId } = await app.makeShop())
  add = thingsBy(owner)
})
afterAll(() => app.close())

describe('pairing a printer with a resin', () => {
  it('by fifteen people at once makes one pairing, and everybody gets it', async () => {
    const [printer, resin] = [await add.printer(), await add.resin()]
    const body = { printerId: printer.id, resinId: resin.id }
    // Nobody inserts before everybody has looked and found nothing.
    const client = await app.pool.connect()
    await client.query('begin')
    await client.query('lock table pairing in share mode')
    const calls = Array.from({ length: 15 }, () => owner.agent.ok(createPairing, { params: { shopId }, body }))
    await new Promise(resolve => setTimeout(resolve, 200))
    await client.query('commit')
    client.release()
    const answers = await Promise.all(calls)
    expect(new Set(answers.map(answer => answer.id)).size).toBe(1)
    expect(await app.database.$count(pairing, eq(pairing.printerId, printer.id))).toBe(1)
    expect(await app.database.$count(auditEvent, and(eq(auditEvent.thingId, answers[0]?.id ?? ''), eq(auditEvent.action, 'created')))).toBe(1)
  })

  // More than the pool has connections: a restore that asked for a second one each would wait for itself.
  it('that was retired brings it back once, for fifteen people with a key each at once', async () => {
    const made = await add.pairing()
    await owner.agent.ok(retirePairing, { params: { shopId, pairingId: made.id }, version: 1 })
    const body = { printerId: made.printerId, resinId: made.resinId }
    const answers = await Promise.all(Array.from({ length: 15 }, (_, i) => owner.agent.ok(createPairing, { params: { shopId }, body, key: `back-${i}` })))
    expect(answers.map(answer => [answer.id, answer.retiredAt, answer.version])).toEqual(new Array(15).fill([made.id, null, 3]))
    expect(await app.database.$count(auditEvent, and(eq(auditEvent.thingId, made.id), eq(auditEvent.action, 'restored')))).toBe(1)
  })

  it('of which one is retired is refused at its field', async () => {
    const [printer, resin, otherResin] = [await add.printer(), await add.resin(), await add.resin()]
    await owner.agent.ok(retireResin, { params: { shopId, resinId: resin.id }, version: 1 })
    const byResin = await owner.agent.refused(createPairing, { params: { shopId }, body: { printerId: printer.id, resinId: resin.id } })
    expect([byResin.code, byResin.fields?.[0]?.path, byResin.detail]).toEqual(['validation-failed', 'body.resinId', 'This resin is retired. Restore it first, or choose another.'])
    await owner.agent.ok(retirePrinter, { params: { shopId, printerId: printer.id }, version: 1 })
    const byPrinter = await owner.agent.refused(createPairing, { params: { shopId }, body: { printerId: printer.id, resinId: otherResin.id } })
    expect(byPrinter.fields?.[0]?.path).toBe('body.printerId')
  })

  it('keeps its two things: they cannot be changed, only its notes', async () => {
    const [made, other] = [await add.pairing(), await add.resin()]
    const params = { shopId, pairingId: made.id }
    expect((await owner.agent.refused(updatePairing, { params, version: 1, body: { notes: '', resinId: other.id } })).code).toBe('validation-failed')
    expect(await owner.agent.ok(updatePairing, { params, version: 1, body: { notes: 'warm vat' } })).toMatchObject({ notes: 'warm vat', resinId: made.resinId, version: 2 })
  })
})

describe('the list of pairings', () => {
  it('is filtered by printer and by resin, searched by both names, and counts studies in use', async () => {
    const [one, two] = [await add.pairing(), await add.pairing()]
    await add.study(one.id)
    await add.study(one.id)
    const list = async (query: Record<string, string>) => (await owner.agent.ok(listPairings, { params: { shopId }, query })).items
    expect(await list({ printerId: one.printerId })).toMatchObject([{ id: one.id, studyCount: 2 }])
    expect(await list({ resinId: two.resinId })).toMatchObject([{ id: two.id, studyCount: 0 }])
    expect(await list({ printerId: one.printerId, resinId: two.resinId })).toEqual([])
    expect((await list({ q: two.resinName.toUpperCase() })).map(item => item.id)).toContain(two.id)
  })
})
