import { afterAll, beforeAll, expect, it } from 'vitest'
import { expectAccessible, expectNoSidewaysScroll, openStage, type Stage } from './helpers.ts'

let stage: Stage
beforeAll(async () => {
  stage = await openStage()
})
afterAll(() => stage.close())

const pages = ['bench', 'studies', 'studies/new', 'printers', 'printers/new', 'resins', 'lots', 'pairings', 'members']

it('every list and form fits a phone', async () => {
  const visitor = await stage.open({ width: 390, height: 844 })
  const shopId = await visitor.signInAs('owner')
  for (const path of pages) {
    await visitor.goto(`/shop/${shopId}/${path}`)
    await visitor.page.waitForLoadState('networkidle')
    await expectNoSidewaysScroll(visitor.page, path)
  }
  await visitor.close()
})

it('a shop of fifty printers and fifty resins keeps the heads of its bench in sight, and the page never scrolls sideways', async () => {
  const visitor = await stage.open()
  const { page } = visitor
  const shopId = await visitor.signInAs('engineer')
  const { pool } = stage.database
  for (const table of ['printer', 'resin']) {
    const { rows } = await pool.query(`select * from ${table} where shop_id = $1 limit 1`, [shopId])
    const columns = Object.keys(rows[0]).filter(name => name !== 'id' && name !== 'name')
    await pool.query(`insert into ${table} (id, name, ${columns.join(', ')})
      select gen_random_uuid(), 'Many ' || to_char(n, 'FM00'), ${columns.join(', ')} from generate_series(1, 50) n, (select * from ${table} where id = $1) one`, [rows[0].id])
  }
  await visitor.goto(`/shop/${shopId}/bench`)
  const grid = page.getByRole('region', { name: 'Printers by resins' })
  await grid.scrollIntoViewIfNeeded()
  await expectNoSidewaysScroll(page, 'bench of fifty printers')
  const first = await grid.boundingBox()
  await grid.evaluate(box => box.scrollTo(box.scrollWidth, box.scrollHeight))
  const printer = await page.getByRole('columnheader', { name: /^Wide plate/ }).boundingBox()
  const resin = await page.getByRole('rowheader').last().boundingBox()
  // Where everything was scrolled away, the printer's head is still at the top of the grid and the resin's at its left.
  expect(Math.abs((printer?.y ?? 0) - (first?.y ?? 0))).toBeLessThan(3)
  expect(Math.abs((resin?.x ?? 0) - (first?.x ?? 0))).toBeLessThan(3)
  await page.getByRole('searchbox', { name: 'Find a printer or resin' }).fill('Many 4')
  await expect.poll(() => page.getByRole('columnheader', { name: /^Many/ }).count()).toBe(10)
  await expectAccessible(page, 'bench of fifty printers')
  await visitor.close()
})
