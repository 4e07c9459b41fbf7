import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { expectAccessible, expectNoSidewaysScroll, openStage, type Stage, type Theme } from './helpers.ts'

let stage: Stage
beforeAll(async () => {
  stage = await openStage()
})
afterAll(() => stage.close())

const openPages = ['/sign-in', '/sign-up', '/sign-up/confirm?token=this-token-is-used-up-long-ago', '/reset', '/reset/new?token=x', '/invitation?token=this-token-is-used-up-long-ago', '/development/mailbox', '/no-such-page']

/** Twice some thirty pages under axe, on a machine that others keep busy. */
const pagesMilliseconds = 400_000

/** Every page of a shop; `{study}` is filled in with one of the demo's. */
const shopPages = [
  'bench', 'studies', 'studies?q=nothing-fits-this', 'studies/new', 'printers', 'printers/new', 'resins', 'resins/new', 'lots', 'lots/new', 'pairings', 'members', 'no-such-page',
  'printers/{printer}', 'resins/{resin}', 'lots/{lot}', 'pairings/{pairing}',
  'studies/{study}/plan', 'studies/{study}/film', 'studies/{study}/result', 'studies/{study}/bench-sheet',
]

async function ids(shopId: string): Promise<Record<string, string>> {
  const first = async (table: string) => String((await stage.database.pool.query(`select id from ${table} where shop_id = $1 order by created_at limit 1`, [shopId])).rows[0]?.id)
  return { printer: await first('printer'), resin: await first('resin'), lot: await first('lot'), pairing: await first('pairing'), study: await first('study') }
}

const fill = (path: string, values: Record<string, string>) => path.replace(/\{(\w+)\}/g, (_, name: string) => values[name] ?? name)

describe.concurrent.each<[Theme, number]>([['daylight', 1280], ['safelight', 820]])('in %s at %i px', (theme, width) => {
  it('every open page is accessible and fits the window', async () => {
    const visitor = await stage.open({ theme, width })
    for (const path of openPages) {
      await visitor.goto(path)
      await visitor.page.waitForLoadState('networkidle')
      await expectNoSidewaysScroll(visitor.page, path)
      await expectAccessible(visitor.page, `${theme} ${width} ${path}`)
    }
    await visitor.close()
  })

  it('every page of a shop is accessible, fits the window and complains of nothing', async () => {
    const visitor = await stage.open({ theme, width })
    const shopId = await visitor.signInAs('owner')
    const values = await ids(shopId)
    for (const path of ['/account', '/shops/new', ...shopPages.map(page => `/shop/${shopId}/${fill(page, values)}`)]) {
      await visitor.goto(path)
      await visitor.page.waitForLoadState('networkidle')
      await expectNoSidewaysScroll(visitor.page, path)
      await expectAccessible(visitor.page, `${theme} ${width} ${path.replace(shopId, 'shop')}`)
    }
    expect(visitor.complaints).toEqual([])
    await visitor.close()
  }, pagesMilliseconds)
})

describe('moving about', () => {
  it('gives the new page’s heading the focus, and the first Tab leads past the frame', async () => {
    const visitor = await stage.open()
    const { page } = visitor
    await visitor.signInAs('owner')
    await page.getByRole('link', { name: 'Printers', exact: true }).click()
    await page.getByRole('heading', { level: 1, name: 'Printers' }).waitFor()
    await page.waitForFunction(() => document.activeElement?.tagName === 'H1')
    await page.reload()
    await page.getByRole('heading', { level: 1, name: 'Printers' }).waitFor()
    await page.keyboard.press('Tab')
    expect(await page.evaluate(() => document.activeElement?.textContent)).toBe('Skip to the content')
    await visitor.close()
  })

  it('follows the system’s theme at the first visit and remembers the choice', async () => {
    const context = await stage.browser.newContext({ baseURL: stage.url, colorScheme: 'dark' })
    const page = await context.newPage()
    await page.goto('/sign-in')
    const theme = () => page.evaluate(() => document.documentElement.dataset.theme)
    await page.getByRole('button', { name: 'Safelight', pressed: true }).waitFor()
    expect(await theme()).toBe('safelight')
    await page.getByRole('button', { name: 'Daylight' }).click()
    await page.reload()
    await page.getByRole('button', { name: 'Daylight', pressed: true }).waitFor()
    expect(await theme()).toBe('daylight')
    await context.close()
  })
})
