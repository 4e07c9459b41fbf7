import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { auditEvent, passwordReset } from '#db/schema/index.ts'
import { completePasswordReset, requestPasswordReset, signIn } from '#shared/contracts/session.ts'
import { linksIn, startTestApp, testPassword, tokenIn, type TestApp } from '#tests/helpers/test-app.ts'

let app: TestApp
beforeAll(async () => {
  app = await startTestApp()
})
afterAll(() => app.close())

const password = 'a new bulb in the lamp'
async function askFor(email: string): Promise<string> {
  await app.visitor().ok(requestPasswordReset, { body: { email } })
  return tokenIn(app.mailTo(email))
}

describe('a forgotten password', () => {
  it('is replaced by the link of a mail, and every session of the person ends', async () => {
    const { owner, shopId } = await app.makeShop()
    const elsewhere = await app.signedIn(owner)
    const token = await askFor(owner.email)
    expect(linksIn(app.mailTo(owner.email))).toEqual([`http://fanlight.test/reset/new?token=${token}`])
    await app.visitor().ok(completePasswordReset, { body: { token, password } })
    for (const agent of [owner.agent, elsewhere]) expect((await agent.session()).user).toBeNull()
    expect((await app.visitor().refused(signIn, { body: { email: owner.email, password: testPassword } })).code).toBe('wrong-credentials')
    expect((await app.visitor().signIn(owner.email, password)).user?.id).toBe(owner.userId)
    const events = await app.database.select().from(auditEvent).where(eq(auditEvent.shopId, shopId))
    expect(events.map(({ action, actorUserId, after }) => ({ action, actorUserId, after }))).toEqual([{ action: 'set a new password', actorUserId: owner.userId, after: null }])
  })

  it('leaves other people’s sessions alone', async () => {
    const [person, other] = [await app.makePerson(), await app.makePerson()]
    const agent = await app.signedIn(other)
    await app.visitor().ok(completePasswordReset, { body: { token: await askFor(person.email), password } })
    expect((await agent.session()).user?.id).toBe(other.userId)
  })

  it('answers an unknown address exactly as a known one, and tells its owner by mail that there is no account', async () => {
    const person = await app.makePerson()
    const known = await app.visitor().call(requestPasswordReset, { body: { email: person.email } })
    const unknown = await app.visitor().call(requestPasswordReset, { body: { email: 'stranger@quillmere.example' } })
    expect([known.status, unknown.status]).toEqual([202, 202])
    expect(unknown.body).toEqual({ sentTo: 'stranger@quillmere.example' })
    expect(Object.keys(unknown.headers).sort()).toEqual(Object.keys(known.headers).sort())
    const mail = app.mailTo('stranger@quillmere.example')
    expect(mail.subject).toBe('There is no account with this address')
    expect(linksIn(mail)).toEqual(['http://fanlight.test/sign-up'])
  })

  it('the link works once', async () => {
    const { email } = await app.makePerson()
    const token = await askFor(email)
    const answers = await Promise.all([1, 2, 3].map(() => app.visitor().call(completePasswordReset, { body: { token, password } })))
    expect(answers.map(answer => answer.status).sort()).toEqual([204, 410, 410])
    expect((await app.visitor().refused(completePasswordReset, { body: { token, password: 'and yet another one' } })).code).toBe('link-not-valid')
    expect((await app.visitor().signIn(email, password)).user?.email).toBe(email)
  })

  it('setting a password voids the other links that were asked for', async () => {
    const { email } = await app.makePerson()
    const [first, second] = [await askFor(email), await askFor(email)]
    await app.visitor().ok(completePasswordReset, { body: { token: second, password } })
    expect((await app.visitor().refused(completePasswordReset, { body: { token: first, password } })).code).toBe('link-not-valid')
  })

  it.each([['59 minutes', 59 * 60_000, 204], ['61 minutes', 61 * 60_000, 410]])('after %s the link answers as it should', async (_words, later, status) => {
    const { email } = await app.makePerson()
    const token = await askFor(email)
    app.clock.advance(later)
    const answer = await app.visitor().call(completePasswordReset, { body: { token, password } })
    app.clock.advance(-later)
    expect(answer.status).toBe(status)
  })

  it('a link that is refused leaves the password and the sessions as they were', async () => {
    const person = await app.makePerson()
    const agent = await app.signedIn(person)
    const token = await askFor(person.email)
    expect((await app.visitor().refused(completePasswordReset, { body: { token, password: 'short' } })).status).toBe(422)
    expect((await app.visitor().refused(completePasswordReset, { body: { token: 'B'.repeat(43), password } })).status).toBe(410)
    expect((await agent.session()).user?.id).toBe(person.userId)
    await app.visitor().ok(completePasswordReset, { body: { token, password } })
  })

  it('keeps the token only as its SHA-256', async () => {
    const person = await app.makePerson()
    const token = await askFor(person.email)
    const rows = await app.database.select().from(passwordReset).where(eq(passwordReset.userId, person.userId))
    expect(rows).toHaveLength(1)
    expect(rows[0]?.tokenHash).toMatch(/^[0-9a-f]{64}$/)
    expect(JSON.stringify(rows)).not.toContain(token)
  })
})
