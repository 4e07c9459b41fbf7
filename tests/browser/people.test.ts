import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { linkFromMail, openStage, type Stage } from './helpers.ts'

let stage: Stage
beforeAll(async () => {
  stage = await openStage()
})
afterAll(() => stage.close())

describe('people', () => {
  it('sign up by a link in their mail, and land in their new shop with the first step to take', async () => {
    const visitor = await stage.open()
    const { page } = visitor
    await visitor.goto('/sign-up')
    await page.getByLabel('Your name').fill('Ada Winter')
    await page.getByLabel('Name of the shop').fill('Winter Models')
    await page.getByLabel('E-mail').fill('ada@winter.example')
    await page.getByLabel('Password').fill('short')
    await page.getByRole('button', { name: 'Send me the link' }).click()
    await page.getByText('At least 12 characters').first().waitFor()
    await page.getByLabel('Password').fill('a sentence that is long')
    await page.getByRole('button', { name: 'Send me the link' }).click()
    await page.getByText('We sent a link to ada@winter.example').waitFor()
    // As a person does on this machine: from the hint to the mail to its link.
    await page.getByRole('link', { name: 'Open the caught mail' }).click()
    await page.getByRole('link', { name: 'Open the link of this mail' }).first().click()
    await page.getByRole('heading', { name: 'First steps' }).waitFor()
    expect(await page.getByRole('link', { name: 'Add a printer' }).count()).toBeGreaterThan(0)
    expect(visitor.complaints.filter(text => !text.includes('422'))).toEqual([])
    await visitor.close()
  })

  it('invite by mail with a role; the new person joins, and what the role forbids is not offered', async () => {
    const owner = await stage.open()
    const shopId = await owner.signInAs('owner')
    await owner.goto(`/shop/${shopId}/members`)
    await owner.page.getByLabel('E-mail').fill('new.hand@quillmere.example')
    await owner.page.getByLabel('Role', { exact: true }).selectOption('viewer')
    await owner.page.getByRole('button', { name: 'Send the invitation' }).click()
    await owner.page.getByRole('table', { name: 'Open invitations' }).getByRole('cell', { name: 'new.hand@quillmere.example', exact: true }).waitFor()

    const guest = await stage.open()
    await guest.goto(await linkFromMail(owner, 'new.hand@quillmere.example'))
    await guest.page.getByText('as viewer').first().waitFor()
    await guest.page.getByLabel('Your name').fill('Noor Lind')
    await guest.page.getByLabel('Password').fill('a sentence that is long')
    await guest.page.getByRole('button', { name: 'Join the shop' }).click()
    await guest.page.getByRole('heading', { level: 1, name: 'Bench' }).waitFor()
    await guest.goto(`/shop/${shopId}/printers`)
    expect(await guest.page.getByRole('link', { name: 'Add a printer' }).count()).toBe(0)

    // Another role, with a way back; then out.
    await owner.page.reload()
    await owner.page.getByLabel('Role of Noor Lind').selectOption('engineer')
    await owner.page.getByText('Noor Lind is engineer now.').waitFor()
    await owner.page.getByRole('button', { name: 'Undo' }).click()
    await owner.page.getByText('Noor Lind is viewer again.').waitFor()
    await owner.page.getByRole('button', { name: 'Remove Noor Lind' }).click()
    await owner.page.getByRole('button', { name: 'Really, now Noor Lind' }).click()
    await owner.page.getByText('Noor Lind is removed.').waitFor()
    await guest.page.goto(`/shop/${shopId}/printers`)
    await guest.page.getByText(/no such shop among yours/i).first().waitFor()
    await owner.close()
    await guest.close()
  })

  it('set a new password by mail, and the old one is of no use', async () => {
    const visitor = await stage.open()
    const { page } = visitor
    const viewer = stage.demo.find(person => person.role === 'approver')
    await visitor.goto('/reset')
    await page.getByLabel('E-mail').fill(viewer?.email ?? '')
    await page.getByRole('button', { name: 'Send me the link' }).click()
    await page.getByText('Look into your mail').waitFor()
    await visitor.goto(await linkFromMail(visitor, viewer?.email ?? ''))
    await page.getByLabel('New password').fill('another long sentence')
    await page.getByRole('button', { name: 'Set the password' }).click()
    await page.getByRole('link', { name: 'Sign in with it' }).click()
    await page.getByLabel('E-mail').fill(viewer?.email ?? '')
    await page.getByLabel('Password').fill(viewer?.password ?? '')
    await page.getByRole('button', { name: 'Sign in', exact: true }).click()
    await page.getByText('Address and password do not fit together.').waitFor()
    await page.getByLabel('Password').fill('another long sentence')
    await page.getByRole('button', { name: 'Sign in', exact: true }).click()
    await page.getByRole('heading', { level: 1, name: 'Bench' }).waitFor()
    await visitor.close()
  })

  it('belong to several shops and switch between them; signing out leaves nothing behind', async () => {
    const visitor = await stage.open()
    const { page } = visitor
    await visitor.signInAs('engineer')
    await page.getByLabel('Shop', { exact: true }).selectOption('new')
    await page.getByLabel('Name of the shop').fill('Second bench')
    await page.getByRole('button', { name: 'Make the shop' }).click()
    await page.getByRole('heading', { name: 'First steps' }).waitFor()
    await page.getByLabel('Shop', { exact: true }).selectOption({ label: 'Quillmere Print Room (demo)' })
    await page.getByRole('heading', { name: 'What is known' }).waitFor()
    const inside = page.url()
    await page.getByRole('button', { name: 'Sign out' }).click()
    await page.getByRole('heading', { level: 1, name: 'Sign in' }).waitFor()
    await page.goto(inside)
    await page.getByRole('heading', { level: 1, name: 'Sign in' }).waitFor()
    await visitor.close()
  })
})
