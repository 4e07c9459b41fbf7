import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Page } from 'playwright-core'
import { expectAccessible, expectNoSidewaysScroll, openStage, type Stage, type Theme } from './helpers.ts'

let stage: Stage
beforeAll(async () => {
  stage = await openStage()
})
afterAll(() => stage.close())

async function expectGood(page: Page, name: string): Promise<void> {
  await expectNoSidewaysScroll(page, name)
  await expectAccessible(page, name)
}

/** Chromium tells every answer of 400 and more as an error of the console; those are part of a state here. */
const withoutAnswers = (complaints: readonly string[]) => complaints.filter(text => !text.startsWith('Failed to load resource'))

// Making a shop changes where a person lands: one for each run.
describe.concurrent.each<[Theme, number, string]>([['daylight', 1280, 'technician'], ['safelight', 820, 'approver']])('in %s at %i px', (theme, width, founder) => {
  it('a shop without anything, its forms with mistakes, and a study without films are accessible and fit the window', async () => {
    const visitor = await stage.open({ theme, width })
    const { page } = visitor
    const name = (state: string) => `${theme} ${width} ${state}`
    await visitor.signInAs(founder)
    await visitor.goto('/shops/new')
    await page.getByLabel('Name of the shop').fill(`Empty bench in ${theme}`)
    await page.getByRole('button', { name: 'Make the shop' }).click()
    await page.getByRole('heading', { name: 'First steps' }).waitFor()
    await expectGood(page, name('bench of a new shop'))
    const shop = new URL(page.url()).pathname.replace(/\/bench$/, '')
    for (const list of ['studies', 'printers', 'resins', 'lots', 'pairings']) {
      await visitor.goto(`${shop}/${list}`)
      await page.getByRole('heading', { level: 2 }).first().waitFor()
      await expectGood(page, name(`no ${list}`))
    }

    await visitor.goto(`${shop}/printers/new`)
    await page.getByRole('button', { name: 'Add the printer' }).click()
    await page.locator('[aria-invalid=true]').first().waitFor()
    // Who types lands in the first field that needs mending.
    expect(await page.evaluate(() => document.activeElement?.getAttribute('aria-invalid'))).toBe('true')
    await expectGood(page, name('printer with mistakes'))
    await page.getByRole('textbox', { name: /^Name/ }).fill('Only printer')
    await page.getByLabel('Pixel size').fill('50')
    await page.getByLabel('Build plate width').fill('120')
    await page.getByLabel('Build plate depth').fill('70')
    await page.getByRole('button', { name: 'Add the printer' }).click()
    await page.getByText('The printer is added.').waitFor()
    await visitor.goto(`${shop}/resins/new`)
    await page.getByRole('textbox', { name: /^Name/ }).fill('Only resin')
    await page.getByRole('button', { name: 'Add the resin' }).click()
    await page.getByText('The resin is added.').waitFor()
    await expectGood(page, name('a message with undo or without'))
    await visitor.goto(`${shop}/studies/new`)
    await page.getByRole('combobox', { name: /^Printer/ }).selectOption({ label: 'Only printer' })
    await page.getByRole('combobox', { name: /^Resin/ }).selectOption({ label: 'Only resin' })
    await page.getByRole('button', { name: 'Open the study' }).click()
    await page.waitForURL(/studies\/[0-9a-f-]{36}/)
    const study = new URL(page.url()).pathname.replace(/\/(plan|film|result)$/, '')
    for (const chapter of ['plan', 'film', 'result', 'bench-sheet']) {
      await visitor.goto(`${study}/${chapter}`)
      await page.waitForLoadState('networkidle')
      await expectGood(page, name(`${chapter} of a study without films`))
    }
    expect(withoutAnswers(visitor.complaints)).toEqual([])
    await visitor.close()
  })

  it('a page whose server fails says so with a way to try again, and comes back by it', async () => {
    const visitor = await stage.open({ theme, width })
    const { page } = visitor
    const shopId = await visitor.signInAs('viewer')
    const problem = { type: 'about:blank', title: 'Failure', status: 500, code: 'internal', detail: 'The server failed. Try again.', requestId: '0198a0a0-0000-7000-8000-000000000000' }
    await page.route('**/api/shops/*/printers?*', route => route.fulfill({ status: 500, contentType: 'application/problem+json', body: JSON.stringify(problem) }))
    await visitor.goto(`/shop/${shopId}/printers`)
    await page.getByText('This did not work').waitFor()
    await expectGood(page, `${theme} ${width} printers that cannot be read`)
    await page.unroute('**/api/shops/*/printers?*')
    await page.getByRole('button', { name: 'Try again' }).click()
    await page.getByRole('link', { name: 'North bench' }).waitFor()
    await visitor.context.setOffline(true)
    await page.getByText(/^No connection/).waitFor()
    await expectGood(page, `${theme} ${width} without a connection`)
    expect(withoutAnswers(visitor.complaints)).toEqual([])
    await visitor.close()
  })

  it('whatever the keyboard reaches shows that it has the focus', async () => {
    const visitor = await stage.open({ theme, width })
    const { page } = visitor
    const shopId = await visitor.signInAs('engineer')
    const { rows } = await stage.database.pool.query(`select id from study where shop_id = $1 and name like 'Model sand%'`, [shopId])
    for (const path of [`/shop/${shopId}/bench`, `/shop/${shopId}/printers/new`, `/shop/${shopId}/studies/${String(rows[0]?.id)}/film`]) {
      await visitor.goto(path)
      await page.waitForLoadState('networkidle')
      const hidden: string[] = []
      const seen = new Set<string>()
      for (let press = 0; press < 60; press++) {
        await page.keyboard.press('Tab')
        const focused = await page.evaluate(() => {
          const element = document.activeElement
          if (!(element instanceof HTMLElement || element instanceof SVGElement) || element === document.body) return null
          const { outlineStyle, outlineWidth } = getComputedStyle(element)
          const { top, bottom, width, height } = element.getBoundingClientRect()
          const name = `${element.tagName} ${element.getAttribute('aria-label') ?? element.textContent?.trim().slice(0, 40) ?? ''}`
          return { name, shown: outlineStyle !== 'none' && Number.parseFloat(outlineWidth) >= 2 && width > 0 && height > 0 && bottom > 0 && top < innerHeight }
        })
        if (focused === null) break
        seen.add(focused.name)
        if (!focused.shown) hidden.push(focused.name)
      }
      expect(hidden, path).toEqual([])
      expect(seen.size, path).toBeGreaterThan(10)
    }
    await visitor.close()
  })
})
