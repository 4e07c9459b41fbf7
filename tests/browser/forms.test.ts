import { afterAll, beforeAll, expect, it } from 'vitest'
import { openStage, type Stage, type Visitor } from './helpers.ts'

let stage: Stage
beforeAll(async () => {
  stage = await openStage()
})
afterAll(() => stage.close())

async function signInHere({ page }: Visitor, role: string): Promise<void> {
  const person = stage.demo.find(item => item.role === role)
  await page.getByLabel('E-mail').fill(person?.email ?? '')
  await page.getByLabel('Password').fill(person?.password ?? '')
  await page.getByRole('button', { name: 'Sign in', exact: true }).click()
}

it('a session that ends in the middle of a form costs one sign-in: the form is there again as it was left, and saves', async () => {
  const visitor = await stage.open()
  const { page, context } = visitor
  const shopId = await visitor.signInAs('engineer')
  await visitor.goto(`/shop/${shopId}/resins/new`)
  await page.getByRole('textbox', { name: /^Name/ }).fill('Dental clear')
  await page.getByRole('textbox', { name: /^Description/ }).fill('half a sentence')
  await context.clearCookies()
  await page.getByRole('button', { name: 'Add the resin' }).click()
  await page.getByRole('link', { name: 'Sign in again and come back here' }).click()
  await signInHere(visitor, 'engineer')
  await page.getByRole('heading', { level: 1, name: 'Add a resin' }).waitFor()
  expect(await page.getByRole('textbox', { name: /^Description/ }).inputValue()).toBe('half a sentence')
  await page.getByRole('button', { name: 'Add the resin' }).click()
  await page.getByText('The resin is added.').waitFor()
  await visitor.close()
})

it('what one person left unsaved is not shown to the next at the same tablet', async () => {
  const visitor = await stage.open()
  const { page } = visitor
  const shopId = await visitor.signInAs('engineer')
  await visitor.goto(`/shop/${shopId}/printers/new`)
  await page.getByRole('textbox', { name: /^Name/ }).fill('Not for others')
  await page.getByRole('button', { name: 'Sign out' }).click()
  await page.getByRole('heading', { level: 1, name: 'Sign in' }).waitFor()
  await visitor.signInAs('owner')
  await visitor.goto(`/shop/${shopId}/printers/new`)
  expect(await page.getByRole('textbox', { name: /^Name/ }).inputValue()).toBe('')
  await visitor.close()
})

it('a study opens under a name of any script', async () => {
  const visitor = await stage.open()
  const { page } = visitor
  const shopId = await visitor.signInAs('engineer')
  await visitor.goto(`/shop/${shopId}/studies/new`)
  await page.getByRole('combobox', { name: /^Printer/ }).selectOption({ label: 'North bench' })
  await page.getByRole('combobox', { name: /^Resin/ }).selectOption({ label: 'Everyday grey' })
  await page.getByRole('textbox', { name: /^Name/ }).fill('Łódź 試験')
  await page.getByRole('button', { name: 'Open the study' }).click()
  await page.getByRole('heading', { level: 1, name: 'Łódź 試験' }).waitFor()
  await visitor.close()
})

it('two renamings of one shop meet: both names are shown, and the one that was being typed is not lost', async () => {
  const [first, second] = [await stage.open(), await stage.open()]
  const shopId = await first.signInAs('owner')
  await second.signInAs('owner')
  for (const visitor of [first, second]) await visitor.goto(`/shop/${shopId}/members`)
  const name = ({ page }: Visitor) => page.getByRole('textbox', { name: 'Name' })
  await name(first).fill('North Print Room')
  await name(second).fill('South Print Room')
  await first.page.getByRole('button', { name: 'Rename' }).click()
  await first.page.getByText('The shop has its new name.').waitFor()
  await second.page.getByRole('button', { name: 'Rename' }).click()
  const row = second.page.getByRole('row', { name: /South Print Room/ })
  await row.waitFor()
  expect(await row.textContent()).toContain('North Print Room')
  await second.page.getByRole('button', { name: 'Save mine over it' }).click()
  await second.page.getByText('The shop has its new name.').waitFor()
  await first.page.reload()
  await first.page.getByLabel('Shop', { exact: true }).getByRole('option', { name: 'South Print Room' }).waitFor({ state: 'attached' })
  await first.close()
  await second.close()
})
