import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { openStage, type Stage } from './helpers.ts'

let stage: Stage
beforeAll(async () => {
  stage = await openStage()
})
afterAll(() => stage.close())

describe('two people who edit one printer', () => {
  it('see both versions; saving mine keeps their other fields, taking theirs loses nothing of theirs', async () => {
    const [first, second] = [await stage.open(), await stage.open()]
    const shopId = await first.signInAs('owner')
    await second.signInAs('engineer')
    await first.goto(`/shop/${shopId}/printers`)
    await first.page.getByRole('link', { name: 'North bench' }).click()
    await first.page.getByLabel('Notes').waitFor()
    const address = new URL(first.page.url()).pathname
    await second.goto(address)
    await second.page.getByLabel('Notes').fill('what the engineer found')

    await first.page.getByLabel('Pixel size').fill('51')
    await first.page.getByRole('button', { name: 'Save', exact: true }).click()
    await first.page.getByText('The printer is saved.').waitFor()

    await second.page.getByRole('button', { name: 'Save', exact: true }).click()
    await second.page.getByText('Somebody else changed this meanwhile').waitFor()
    const row = second.page.getByRole('row', { name: /Notes/ })
    expect(await row.textContent()).toContain('what the engineer found')
    await second.page.getByRole('button', { name: 'Save mine over it' }).click()
    await second.page.getByText('The printer is saved.').waitFor()
    expect(await second.page.getByLabel('Pixel size').inputValue()).toBe('51')

    // And the other way: take theirs.
    await first.page.getByLabel('Notes').fill('mine, to be dropped')
    await first.page.getByRole('button', { name: 'Save', exact: true }).click()
    await first.page.getByRole('button', { name: 'Take theirs' }).click()
    expect(await first.page.getByLabel('Notes').inputValue()).toBe('what the engineer found')
    await first.close()
    await second.close()
  })
})

describe('a form', () => {
  it('keeps what was typed over a reload, and sends wrong fields back with a sentence each', async () => {
    const visitor = await stage.open()
    const { page } = visitor
    const shopId = await visitor.signInAs('owner')
    await visitor.goto(`/shop/${shopId}/printers/new`)
    await page.getByLabel('Name', { exact: false }).first().fill('Loft')
    await page.getByLabel('Light engine wavelength').fill('4050')
    await page.getByRole('button', { name: 'Add the printer' }).click()
    await page.getByText('At most 800 nm.').waitFor()
    await page.reload()
    await page.getByLabel('Light engine wavelength').waitFor()
    expect(await page.getByLabel('Light engine wavelength').inputValue()).toBe('4050')
    await page.getByLabel('Light engine wavelength').fill('405')
    await page.getByLabel('Pixel size').fill('35')
    await page.getByLabel('Build plate width').fill('130')
    await page.getByLabel('Build plate depth').fill('80,5')
    await page.getByRole('button', { name: 'Add the printer' }).click()
    await page.getByRole('link', { name: 'Loft' }).waitFor()
    await visitor.close()
  })
})

describe('a list', () => {
  it('keeps search, filter and order in the address: shareable, and the back button works', async () => {
    const visitor = await stage.open()
    const { page } = visitor
    const shopId = await visitor.signInAs('owner')
    await visitor.goto(`/shop/${shopId}/studies`)
    await page.getByLabel('Search').fill('grey')
    await page.getByText('2 of 2').waitFor()
    await page.getByRole('button', { name: 'Study', exact: true }).click()
    await page.waitForURL(/sort=name/)
    expect(page.url()).toContain('q=grey')
    const shared = await stage.open()
    await shared.signInAs('viewer')
    await shared.goto(page.url())
    await shared.page.getByText('2 of 2').waitFor()
    await page.getByRole('link', { name: 'Everyday grey at 50 µm' }).click()
    await page.waitForURL(/studies\/[0-9a-f-]{36}/)
    await page.goBack()
    await page.getByText('2 of 2').waitFor()
    expect(await page.getByLabel('Search').inputValue()).toBe('grey')
    await page.getByLabel('Search').fill('no such thing')
    await page.getByRole('heading', { name: 'Nothing fits these filters' }).waitFor()
    await page.getByRole('button', { name: 'Clear the filters' }).click()
    await page.getByText('5 of 5').waitFor()
    await visitor.close()
    await shared.close()
  })

  it('of resins shows one retired and brought back by the message’s undo', async () => {
    const visitor = await stage.open()
    const { page } = visitor
    const shopId = await visitor.signInAs('owner')
    await visitor.goto(`/shop/${shopId}/resins`)
    await page.getByRole('link', { name: 'Tough amber' }).click()
    await page.getByRole('button', { name: 'Retire this resin' }).click()
    await page.getByText('Tough amber is retired.').waitFor()
    await page.getByRole('button', { name: 'Undo' }).click()
    await page.getByText('Tough amber is in use again.').waitFor()
    await page.getByRole('button', { name: 'Retire this resin' }).waitFor()
    await visitor.close()
  })
})

describe('a study', () => {
  it('is retired from its own page, can only be read then, and comes back by the message’s undo', async () => {
    const visitor = await stage.open()
    const { page } = visitor
    const shopId = await visitor.signInAs('engineer')
    await visitor.goto(`/shop/${shopId}/studies`)
    await page.getByRole('link', { name: 'Everyday grey on the south bench' }).click()
    await page.getByRole('button', { name: 'Edit study' }).click()
    await page.getByRole('button', { name: 'Retire this study' }).click()
    await page.getByText('This study is retired').waitFor()
    expect(await page.getByRole('button', { name: 'Edit study' }).count()).toBe(0)
    await page.getByRole('button', { name: 'Undo', exact: true }).last().click()
    await page.getByText('The study is in use again.').waitFor()
    await page.getByRole('button', { name: 'Edit study' }).waitFor()
    await visitor.close()
  })
})
