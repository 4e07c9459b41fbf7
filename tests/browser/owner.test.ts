import { afterAll, beforeAll, expect, it } from 'vitest'
import { openStage, type Stage } from './helpers.ts'

let stage: Stage
beforeAll(async () => {
  stage = await openStage()
})
afterAll(() => stage.close())

/** The truth behind the films that are typed: Dp 120 µm, critical time 1.2 s, read by a caliper that errs by a few µm. */
const depthAt = (exposure: number, i: number) => (120 * Math.log(exposure / 1.2) + ([2, -3, 1, 3, -2, -1][i] ?? 0)) / 1000

it('a new owner comes from sign-up to an exposure for a layer height that was never printed', async () => {
  const visitor = await stage.open()
  const { page } = visitor
  await visitor.goto('/sign-up')
  await page.getByLabel('Your name').fill('Ida Brook')
  await page.getByLabel('Name of the shop').fill('Brook Castings')
  await page.getByLabel('E-mail').fill('ida@brook.example')
  await page.getByLabel('Password').fill('light through a small window')
  await page.getByRole('button', { name: 'Send me the link' }).click()
  await page.getByRole('link', { name: 'Open the caught mail' }).click()
  await page.getByRole('link', { name: 'Open the link of this mail' }).first().click()
  await page.getByRole('heading', { name: 'First steps' }).waitFor()

  // Printer.
  await page.getByRole('link', { name: 'Add a printer' }).click()
  await page.getByLabel('Name', { exact: false }).first().fill('First printer')
  await page.getByLabel('Pixel size').fill('50')
  await page.getByLabel('Build plate width').fill('120')
  await page.getByLabel('Build plate depth').fill('70')
  await page.getByRole('button', { name: 'Add the printer' }).click()
  await page.getByText('The printer is added.').waitFor()

  // Resin.
  await page.getByRole('link', { name: 'Bench', exact: true }).click()
  await page.getByRole('link', { name: 'Add a resin' }).click()
  await page.getByLabel('Name', { exact: false }).first().fill('Casting green')
  await page.getByRole('button', { name: 'Add the resin' }).click()
  await page.getByText('The resin is added.').waitFor()

  // Study.
  await page.getByRole('link', { name: 'Bench', exact: true }).click()
  await page.getByRole('region', { name: 'First steps' }).getByRole('link', { name: 'Open a study' }).click()
  await page.getByRole('combobox', { name: /^Printer/ }).selectOption({ label: 'First printer' })
  await page.getByRole('combobox', { name: /^Resin/ }).selectOption({ label: 'Casting green' })
  expect(await page.getByLabel('Name', { exact: false }).last().inputValue()).toBe('Casting green on First printer at 50 µm')
  await page.getByRole('button', { name: 'Open the study' }).click()

  // Plan: nothing is known yet, so a wide set on the printer's step.
  await page.getByRole('heading', { name: 'Plan films' }).waitFor()
  await page.getByRole('button', { name: 'Use this plan' }).click()
  await page.getByRole('heading', { name: 'Films to expose' }).waitFor()
  await page.getByRole('link', { name: 'Bench sheet to print' }).click()
  await page.getByRole('heading', { name: 'Cautions' }).waitFor()
  expect(await page.getByText('Do not post-cure').count()).toBeGreaterThan(0)
  await page.getByRole('link', { name: 'Back to the plan' }).click()
  await page.getByRole('link', { name: 'Enter measured films' }).click()

  // Films: in the order of the grid, value and Enter, as a caliper with a data cable types them.
  const first = page.getByRole('textbox', { name: /^Film 1 at / })
  await first.first().waitFor()
  const labels = await first.evaluateAll(boxes => boxes.map(box => box.getAttribute('aria-label') ?? ''))
  const exposures = labels.map(label => Number.parseFloat(label.replace('Film 1 at ', '')))
  expect(exposures.length).toBeGreaterThanOrEqual(5)
  for (const [i, exposure] of exposures.entries()) {
    await page.getByRole('textbox', { name: new RegExp(`^Film 1 at ${String(exposure).replace('.', '\\.')}`) }).first().focus()
    await page.keyboard.type(`${depthAt(exposure, i).toFixed(3)}`)
    await page.keyboard.press('Enter')
  }
  await page.getByText('Everything typed is stored.').waitFor()
  await page.getByRole('region', { name: 'Verdict of the films' }).or(page.getByText('Verdict of the films')).first().waitFor()

  // Result: Dp and the critical time with intervals around the truth; and a layer height nobody printed.
  await page.getByRole('link', { name: /Result/ }).first().click()
  await page.getByText('Penetration depth Dp').waitFor()
  const numbers = (await page.locator('main').textContent()) ?? ''
  const interval = /Penetration depth Dp\s*(\d+(?:\.\d+)?) µm, (\d+(?:\.\d+)?) to (\d+(?:\.\d+)?)/.exec(numbers)
  expect(interval, numbers.slice(0, 600)).not.toBeNull()
  expect(Number(interval?.[2])).toBeLessThan(120)
  expect(Number(interval?.[3])).toBeGreaterThan(120)
  // A timer that repeats to 20 % makes Dp less sure; the form and its worker are fetched when it is opened.
  await page.getByText('Exposures that are uncertain themselves').click()
  await page.getByText('With uncertain exposures: Dp').waitFor()
  const widthOf = async () => {
    const [, lower = '', upper = ''] = /Dp (?:\d+(?:\.\d+)?) µm, (\d+(?:\.\d+)?) to (\d+(?:\.\d+)?)/.exec((await page.getByText('With uncertain exposures: Dp').textContent()) ?? '') ?? []
    return Number(upper) - Number(lower)
  }
  const narrow = await widthOf()
  expect(narrow).toBeGreaterThan(0)
  await page.getByLabel('Repeatability of the exposure').fill('20')
  await expect.poll(widthOf).toBeGreaterThan(2 * narrow)
  await page.getByLabel('Another layer height').fill('30')
  const table = page.getByRole('region', { name: 'Exposure for 30 µm layers by each rule' })
  await table.waitFor()
  // 30 µm and 50 µm beyond: 80 µm of depth is 1.2 s · exp(80/120) = 2.34 s by the truth.
  const overcure = (await table.getByRole('row', { name: /Constant overcure/ }).getByRole('cell').last().textContent()) ?? ''
  const step = Number.parseFloat(overcure)
  expect(step, overcure).toBeGreaterThan(2.1)
  expect(step).toBeLessThan(2.6)
  expect(Math.abs(step * 10 - Math.round(step * 10))).toBeLessThan(1e-9)
  expect(visitor.complaints).toEqual([])
  await visitor.close()
})
