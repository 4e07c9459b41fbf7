import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import type { Page } from 'playwright-core'
import { openStage, type Stage, type Visitor } from './helpers.ts'

let stage: Stage
let visitor: Visitor
let page: Page
let studyPath: string

beforeAll(async () => {
  stage = await openStage()
  visitor = await stage.open({ width: 820, height: 1180 })
  const shopId = await visitor.signInAs('technician')
  const { rows } = await stage.database.pool.query(`select id from study where shop_id = $1 and name like 'Model sand%'`, [shopId])
  studyPath = `/shop/${shopId}/studies/${String(rows[0]?.id)}/film`
  page = visitor.page
})
afterAll(() => stage.close())
beforeEach(async () => {
  await visitor.context.setOffline(false)
  await visitor.goto(studyPath)
  await page.getByRole('textbox', { name: /^Film 1 at 2\.40/ }).waitFor()
})

const box = (film: number, exposure: string) => page.getByRole('textbox', { name: new RegExp(`^Film ${film} at ${exposure.replace('.', '\\.')} s`) })
const stored = () => page.getByText('Everything typed is stored.').waitFor()
async function depthsOf(exposure: number): Promise<(number | null)[]> {
  const { rows } = await stage.database.pool.query(
    `select depth_micrometres from film_reading r join study s on s.id = r.study_id where s.name like 'Model sand%' and exposure = $1 and withdrawn_at is null order by replicate`, [exposure])
  return rows.map(row => (typeof row.depth_micrometres === 'number' ? Math.round(row.depth_micrometres * 1000) / 1000 : null))
}

describe('a caliper that types value and Enter', () => {
  it('moves on by itself, and each unit is understood', async () => {
    await box(2, '2.40').focus()
    await page.keyboard.type('0,085')
    await page.keyboard.press('Enter')
    await stored()
    expect(await page.evaluate(() => document.activeElement?.getAttribute('aria-label') ?? '')).not.toContain('Film 2 at 2.40')
    for (const [text, depth] of [['85um', 85], ['0.086 mm', 86], ['3.3 mil', 83.82], ['87 µm', 87], ['0,085', 85]] as const) {
      await box(2, '2.40').fill(text)
      await page.keyboard.press('Enter')
      await stored()
      await expect.poll(async () => (await depthsOf(2.4))[1]).toBe(depth)
    }
  })

  it('keeps what it cannot understand, marked and explained, and stores nothing of it', async () => {
    const before = await depthsOf(2.4)
    await box(2, '2.40').fill('o.o85')
    await page.keyboard.press('Enter')
    const unreadable = page.getByRole('textbox', { name: /Film 2 at 2\.40 s.*not understood/i })
    await unreadable.waitFor()
    expect(await unreadable.inputValue()).toBe('o.o85')
    await page.getByText('1 value is not stored and waits for you.').waitFor()
    expect(await depthsOf(2.4)).toEqual(before)
    await unreadable.focus()
    await page.keyboard.press('Escape')
    await unreadable.fill('0.085')
    await page.keyboard.press('Enter')
    await stored()
  })

  it('keeps an implausible value and says why it is marked', async () => {
    await box(2, '3.00').fill('85')
    await page.keyboard.press('Enter')
    await stored()
    await box(2, '3.00').focus()
    await page.getByLabel('Chosen cell').getByText(/unit|thicker|above/i).first().waitFor()
    await expect.poll(async () => (await depthsOf(3)).at(-1)).toBe(85_000)
    await page.getByRole('button', { name: 'Undo' }).click()
    await stored()
  })
})

describe('the grid', () => {
  it('takes a block from a spreadsheet, undoes it whole and does it again', async () => {
    const before = await depthsOf(4.2)
    await page.getByText('Paste a block with its exposures').click()
    await page.getByLabel('Block from a spreadsheet').fill('exposure\tfilm 1\tfilm 2\n4.2 s\t0.131\t0.134\n5.1 s\t0.155\t0.152\n')
    await page.getByRole('button', { name: 'Fill the grid' }).click()
    await stored()
    await expect.poll(() => depthsOf(5.1)).toEqual([155, 152])
    await page.getByRole('button', { name: 'Undo' }).click()
    await stored()
    await expect.poll(() => depthsOf(5.1)).toEqual([])
    await expect.poll(() => depthsOf(4.2)).toEqual(before)
    await page.getByRole('button', { name: 'Redo' }).click()
    await stored()
    await expect.poll(() => depthsOf(5.1)).toEqual([155, 152])
  })

  it('excludes a film with a reason, keeps it in the record, and shows who changed what', async () => {
    await box(1, '7.50').focus()
    await page.getByRole('button', { name: 'Exclude …' }).click()
    await page.getByRole('button', { name: 'Torn edge' }).click()
    await page.getByText('Excluded: Torn edge').waitFor()
    await stored()
    await page.getByRole('button', { name: 'Former values' }).click()
    await page.getByText('Milo Vancura').first().waitFor()
    await page.getByRole('button', { name: 'Include again' }).click()
    await stored()
  })

  it('keeps what was typed without a connection over a reload, says so, and sends it when it returns', async () => {
    await visitor.context.setOffline(true)
    await box(2, '2.40').fill('0.0911')
    await page.keyboard.press('Enter')
    await page.getByText(/1 value waits to be sent|No connection/).first().waitFor()
    expect((await depthsOf(2.4))[1]).not.toBe(91.1)
    await visitor.context.setOffline(false)
    await expect.poll(async () => (await depthsOf(2.4))[1], { timeout: 20_000 }).toBe(91.1)
    await stored()
    // A reload between typing and sending: the value is in the browser, not only on the screen.
    await page.route('**/film-readings/save', route => route.abort())
    await box(2, '2.40').fill('0.0922')
    await page.keyboard.press('Enter')
    await page.getByText(/waits to be sent/).first().waitFor()
    await page.unroute('**/film-readings/save')
    await page.reload()
    await expect.poll(async () => (await depthsOf(2.4))[1], { timeout: 20_000 }).toBe(92.2)
  })

  it('shows both versions when two people fill one cell, and either choice works: nothing is overwritten before', async () => {
    const other = await stage.open()
    await other.signInAs('engineer')
    await other.goto(studyPath)
    const theirs = other.page.getByRole('textbox', { name: /^Film 1 at 3\.00 s/ })
    await theirs.waitFor()
    const collide = async (mine: string, late: string) => {
      await box(1, '3.00').fill(mine)
      await page.keyboard.press('Enter')
      await stored()
      await theirs.fill(late)
      await other.page.keyboard.press('Enter')
      const row = other.page.getByRole('row', { name: /^3, film 1/ })
      await row.waitFor()
      expect(await row.textContent()).toContain(mine)
      expect(await row.textContent()).toContain(late)
      await other.page.getByText('1 value is not stored and waits for you.').waitFor()
      expect((await depthsOf(3))[0]).toBe(Number(mine) * 1000)
      return row
    }
    await (await collide('0.100', '0.104')).getByRole('button', { name: 'Mine' }).click()
    await expect.poll(async () => (await depthsOf(3))[0]).toBe(104)
    await visitor.goto(studyPath)
    await (await collide('0.101', '0.109')).getByRole('button', { name: 'Theirs' }).click()
    await other.page.getByText('Everything typed is stored.').waitFor()
    expect((await depthsOf(3))[0]).toBe(101)
    expect(await theirs.inputValue()).toContain('0.101')
    await other.close()
  })
})
