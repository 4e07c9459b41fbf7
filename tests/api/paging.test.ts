import fc from 'fast-check'
import { v7 } from 'uuid'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { printer, resin } from '#db/schema/index.ts'
import { listPrinters } from '#shared/contracts/printers.ts'
import { createResin, listResins } from '#shared/contracts/resins.ts'
import { startTestApp, type TestApp } from '#tests/helpers/test-app.ts'
import { newPrinter, thingsBy } from '#tests/helpers/thing-shop.ts'

let app: TestApp
beforeAll(async () => {
  app = await startTestApp()
})
afterAll(() => app.close())

type Shop = Awaited<ReturnType<TestApp['makeShop']>>

const onePage = ({ owner, shopId }: Shop, query: Record<string, string | number>) => owner.agent.ok(listPrinters, { params: { shopId }, query })

/** Ids of all pages; `between` runs after each page. */
async function walk(shop: Shop, query: Record<string, string | number>, between?: () => Promise<unknown>): Promise<string[]> {
  const seen: string[] = []
  let cursor: string | null = null
  do {
    const page: Awaited<ReturnType<typeof onePage>> = await onePage(shop, { ...query, ...(cursor === null ? {} : { cursor }) })
    seen.push(...page.items.map(item => item.id))
    cursor = page.nextCursor
    await between?.()
  } while (cursor !== null)
  return seen
}

const printerRow = (shopId: string, wavelength: number) => ({ ...newPrinter, id: v7(), shopId, name: `Printer ${v7()}`, lightEngineWavelengthNanometres: wavelength })

describe('a walk through the pages of a list', () => {
  it('shows each row that was there at the start once, whatever the ties, the page size and what is added meanwhile', async () => {
    const shop = await app.makeShop()
    const { shopId } = shop
    await fc.assert(fc.asyncProperty(
      // Few values and many rows: ties at every page's edge. 405.1 has no exact binary form.
      fc.array(fc.constantFrom(385, 405, 405.1, 365.00000000000006), { maxLength: 25 }),
      fc.integer({ min: 1, max: 9 }),
      fc.constantFrom('name', '-name', 'lightEngineWavelengthNanometres', '-lightEngineWavelengthNanometres', 'updatedAt', '-updatedAt'),
      async (wavelengths, limit, sort) => {
        await app.pool.query('delete from printer where shop_id = $1', [shopId])
        const rows = wavelengths.map(wavelength => printerRow(shopId, wavelength))
        if (rows.length > 0) await app.database.insert(printer).values(rows)
        let left = 5
        const seen = await walk(shop, { sort, limit }, async () => {
          if (left-- > 0) await app.database.insert(printer).values(printerRow(shopId, 405))
        })
        expect(new Set(seen).size).toBe(seen.length)
        expect(rows.filter(row => !seen.includes(row.id))).toEqual([])
      },
    ), { numRuns: 25, seed: 7 })
  })

  it.each([
    ['of three bytes each', '樹'.repeat(119)],
    ['that JSON writes with six', '\u0001'.repeat(119)],
    ['that are quotes', '"'.repeat(119)],
    ['of two units each', '💡'.repeat(59)],
  ])('goes on after a name of 120 characters %s', async (_what, start) => {
    const { owner, shopId } = await app.makeShop()
    await app.database.insert(resin).values(['a', 'b', 'c'].map(end => ({ id: v7(), shopId, name: start + end })))
    const names: string[] = []
    let cursor: string | null = null
    do {
      const page: { items: { name: string }[]; nextCursor: string | null } = await owner.agent.ok(listResins, { params: { shopId }, query: { limit: 1, ...(cursor === null ? {} : { cursor }) } })
      names.push(...page.items.map(item => item.name.slice(-1)))
      cursor = page.nextCursor
    } while (cursor !== null)
    expect(names).toEqual(['a', 'b', 'c'])
  })

  it('refuses the cursor of another order, and one with a zero byte', async () => {
    const shop = await app.makeShop()
    const add = thingsBy(shop.owner)
    await add.printer()
    await add.printer()
    const { nextCursor } = await onePage(shop, { limit: 1, sort: 'name' })
    for (const query of [
      { cursor: nextCursor ?? '', sort: '-name' },
      { cursor: nextCursor ?? '', sort: 'updatedAt' },
      { cursor: Buffer.from(JSON.stringify(['name', 'a\0', v7()])).toString('base64url') },
      { cursor: Buffer.from(JSON.stringify(['lightEngineWavelengthNanometres', '1e999', v7()])).toString('base64url'), sort: 'lightEngineWavelengthNanometres' },
    ]) {
      expect((await shop.owner.agent.refused(listPrinters, { params: { shopId: shop.shopId }, query })).code).toBe('bad-request')
    }
  })

  it.each([[0, 422], [1, 200], [200, 200], [201, 422], ['ten', 422], ['1.5', 422]])('takes pages of %s with status %i', async (limit, status) => {
    const { owner, shopId } = await app.makeShop()
    expect((await owner.agent.call(listResins, { params: { shopId }, query: { limit } })).status).toBe(status)
  })

  it('sorts names without regard to case', async () => {
    const { owner, shopId } = await app.makeShop()
    for (const name of ['beta', 'Alpha', 'Gamma', 'alpha 2']) await owner.agent.ok(createResin, { params: { shopId }, body: { name, description: '', notes: '' } })
    expect((await owner.agent.ok(listResins, { params: { shopId }, query: { sort: 'name' } })).items.map(item => item.name)).toEqual(['Alpha', 'alpha 2', 'beta', 'Gamma'])
  })
})
