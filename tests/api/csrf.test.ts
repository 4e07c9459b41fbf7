import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { createShop } from '#shared/contracts/members.ts'
import { signIn } from '#shared/contracts/session.ts'
import { startTestApp, testPassword, type TestApp, type TestMember } from '#tests/helpers/test-app.ts'

let app: TestApp
let owner: TestMember
beforeAll(async () => {
  app = await startTestApp();
  ({ owner } = await app.makeShop())
})
afterAll(() => app.close())

const body = { name: 'Made by a page' }
const shopsOfOwner = async () => (await owner.agent.session()).memberships.length
async function expectRefused(headers: Readonly<Record<string, string>>): Promise<void> {
  const before = await shopsOfOwner()
  const problem = await owner.agent.refused(createShop, { body, headers })
  expect(problem).toMatchObject({ status: 403, code: 'csrf-token-missing' })
  expect(await shopsOfOwner()).toBe(before)
}

describe('a write', () => {
  it('without the token is refused', () => expectRefused({ 'X-CSRF-Token': '' }))

  it.each([['a made-up token', 'f'.repeat(64)], ['a token cut short', 'f'.repeat(63)], ['a token of other letters', 'é'.repeat(64)], ['a token of the word null', 'null']])('with %s is refused', (_words, token) =>
    expectRefused({ 'X-CSRF-Token': token }))

  it('with the token of another browser of the same person is refused', async () => {
    const other = await app.signedIn(owner)
    await expectRefused({ 'X-CSRF-Token': (await other.session()).csrfToken })
  })

  it('with the token from before signing in is refused: signing in makes a new one', async () => {
    const person = await app.makePerson()
    const agent = app.visitor()
    const before = (await agent.session()).csrfToken
    const { csrfToken } = await agent.signIn(person.email, testPassword)
    expect(csrfToken).not.toBe(before)
    expect((await agent.refused(createShop, { body, headers: { 'X-CSRF-Token': before } })).code).toBe('csrf-token-missing')
    await agent.ok(createShop, { body, headers: { 'X-CSRF-Token': csrfToken } })
  })

  it('with a token from before signing out is refused', async () => {
    const person = await app.makePerson()
    const agent = await app.signedIn(person)
    const { csrfToken } = await agent.session()
    await agent.signOut()
    expect((await agent.refused(signIn, { body: { email: person.email, password: testPassword }, headers: { 'X-CSRF-Token': csrfToken } })).code).toBe('csrf-token-missing')
  })

  it.each(['https://elsewhere.example', 'null', 'http://127.0.0.1:1', 'http://fanlight.test.elsewhere.example', 'file://'])('from a page of %s is refused, even with the right token', async origin => {
    const { csrfToken } = await owner.agent.session()
    await expectRefused({ 'X-CSRF-Token': csrfToken, Origin: origin })
  })

  it('from our own page, by the address it is served at or the one people reach us by, is taken', async () => {
    const address = app.server.address()
    const port = typeof address === 'object' && address !== null ? address.port : 0
    for (const origin of [`http://127.0.0.1:${port}`, 'http://fanlight.test']) {
      await owner.agent.ok(createShop, { body: { name: `From ${origin}` }, headers: { Origin: origin } })
    }
  })

  it('to sign in needs the token too: nobody is signed in as somebody else unasked', async () => {
    const person = await app.makePerson()
    expect((await app.visitor().refused(signIn, { body: { email: person.email, password: testPassword }, headers: { 'X-CSRF-Token': '' } })).code).toBe('csrf-token-missing')
  })
})
