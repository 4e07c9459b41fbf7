import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { createLot, listLots, restoreLot, retireLot, retireResin, updateLot } from '#shared/contracts/resins.ts'
import { startTestApp, type TestApp, type TestMember } from '#tests/helpers/test-app.ts'
import { newLot, thingsBy } from '#tests/helpers/thing-shop.ts'

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

describe('a lot', () => {
  it('keeps its code to itself within its resin; another resin may have the same code', async () => {
    const [resin, other] = [await add.resin(), await add.resin()]
    const lot = await add.lot(resin.id, { code: 'A-17' })
    const again = await owner.agent.refused(createLot, { params: { shopId }, body: { ...newLot, code: 'a-17', resinId: resin.id } })
    expect([again.code, again.fields?.[0]?.path]).toEqual(['name-taken', 'body.code'])
    await add.lot(other.id, { code: 'A-17' })
    const params = { shopId, lotId: lot.id }
    await owner.agent.ok(retireLot, { params, version: 1 })
    await add.lot(resin.id, { code: 'A-17' })
    expect((await owner.agent.refused(restoreLot, { params, version: 2 })).code).toBe('name-taken')
  })

  it.each(['0000-01-01', '1899-12-31', '2026-02-30', '2026-13-01', '26-01-01', '10000-01-01', 'tomorrow'])('refuses the day %s at its field', async expiresOn => {
    const resin = await add.resin()
    const problem = await owner.agent.refused(createLot, { params: { shopId }, body: { ...newLot, code: 'L', resinId: resin.id, expiresOn } })
    expect([problem.code, problem.fields?.[0]?.path]).toEqual(['validation-failed', 'body.expiresOn'])
  })

  it.each(['1900-01-01', '2028-02-29', '9999-12-31'])('keeps the day %s as it was typed', async expiresOn => {
    const resin = await add.resin()
    expect((await add.lot(resin.id, { expiresOn })).expiresOn).toBe(expiresOn)
  })

  it('of a retired resin is refused', async () => {
    const resin = await add.resin()
    await owner.agent.ok(retireResin, { params: { shopId, resinId: resin.id }, version: 1 })
    const problem = await owner.agent.refused(createLot, { params: { shopId }, body: { ...newLot, code: 'L', resinId: resin.id } })
    expect([problem.code, problem.fields?.[0]?.path]).toEqual(['validation-failed', 'body.resinId'])
  })

  it('stays with its resin', async () => {
    const [resin, other] = [await add.resin(), await add.resin()]
    const lot = await add.lot(resin.id)
    expect((await owner.agent.refused(updateLot, { params: { shopId, lotId: lot.id }, version: 1, body: { resinId: other.id } })).code).toBe('validation-failed')
  })

  it('retired twice is retired once', async () => {
    const lot = await add.lot((await add.resin()).id)
    const params = { shopId, lotId: lot.id }
    const first = await owner.agent.ok(retireLot, { params, version: 1 })
    expect(await owner.agent.ok(retireLot, { params, version: 2 })).toEqual(first)
    expect((await owner.agent.refused(retireLot, { params, version: 1 })).code).toBe('stale-edit')
    const { rows } = await app.pool.query('select action from audit_event where thing_id = $1 order by at', [lot.id])
    expect(rows.map(row => row.action)).toEqual(['created', 'retired'])
  })
})

describe('the list of lots', () => {
  it('sorts by day both ways, days unknown as the oldest, and filters by resin', async () => {
    const resin = await add.resin()
    const days = ['2026-03-01', null, '2025-12-31', '2026-03-01'] as const
    for (const [i, receivedOn] of days.entries()) await add.lot(resin.id, { code: `D${i}`, receivedOn })
    await add.lot((await add.resin()).id, { receivedOn: '2026-01-01' })
    const walk = async (sort: string) => {
      const codes: (string | null)[] = []
      let cursor: string | null = null
      do {
        const page: { items: { receivedOn: string | null }[]; nextCursor: string | null; total: number } = await owner.agent.ok(listLots, {
          params: { shopId }, query: { resinId: resin.id, sort, limit: 1, ...(cursor === null ? {} : { cursor }) },
        })
        expect(page.total).toBe(4)
        codes.push(...page.items.map(item => item.receivedOn))
        cursor = page.nextCursor
      } while (cursor !== null)
      return codes
    }
    expect(await walk('receivedOn')).toEqual([null, '2025-12-31', '2026-03-01', '2026-03-01'])
    expect(await walk('-receivedOn')).toEqual(['2026-03-01', '2026-03-01', '2025-12-31', null])
  })

  it('finds a lot by its code and by its resin’s name, in any case, also beyond ASCII', async () => {
    const resin = await add.resin({ name: 'Ätherblau' })
    const lot = await add.lot(resin.id, { code: 'Ñ-9' })
    for (const q of ['ätherBLAU', 'ñ-9']) {
      expect((await owner.agent.ok(listLots, { params: { shopId }, query: { q } })).items.map(item => item.id)).toEqual([lot.id])
    }
  })
})
