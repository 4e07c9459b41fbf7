import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { auditEvent, shop, signUp as signUpTable, user } from '#db/schema/index.ts'
import { deleteOutdated } from '#server/repositories/clean-up.ts'
import { confirmSignUp, signIn, signUp } from '#shared/contracts/session.ts'
import { linksIn, startTestApp, testPassword, tokenIn, type TestApp } from '#tests/helpers/test-app.ts'

let app: TestApp
beforeAll(async () => {
  app = await startTestApp()
})
afterAll(() => app.close())

const hour = 3_600_000
let count = 0
const newcomer = (changes: Readonly<Record<string, string>> = {}) => ({
  email: `newcomer-${++count}@quillmere.example`, displayName: 'Nell Newcomer', shopName: 'Nell’s shop', password: 'a lamp and a lens', ...changes,
})

describe('signing up', () => {
  it('makes nothing until the link of the mail is followed, then person, shop and audit at once, signed in', async () => {
    const agent = app.visitor()
    const body = newcomer()
    expect(await agent.ok(signUp, { body })).toEqual({ sentTo: body.email })
    expect(await app.database.$count(user, eq(user.email, body.email))).toBe(0)
    expect((await agent.refused(signIn, { body: { email: body.email, password: body.password } })).code).toBe('wrong-credentials')

    const mail = app.mailTo(body.email)
    expect(linksIn(mail)).toEqual([`http://fanlight.test/sign-up/confirm?token=${tokenIn(mail)}`])
    expect(mail.text).toContain('Nell Newcomer')
    const answer = await agent.ok(confirmSignUp, { body: { token: tokenIn(mail) } })
    expect(answer.user).toMatchObject({ email: body.email, displayName: 'Nell Newcomer' })
    expect(answer.memberships).toEqual([{ shopId: answer.memberships[0]?.shopId, shopName: 'Nell’s shop', role: 'owner', demo: false }])
    const events = await app.database.select().from(auditEvent).where(eq(auditEvent.shopId, answer.memberships[0]?.shopId ?? ''))
    expect(events.map(event => [event.action, event.thing, event.actorUserId])).toEqual([['created', 'shop', answer.user?.id]])
    expect((await app.visitor().signIn(body.email, body.password)).user?.id).toBe(answer.user?.id)
  })

  it('answers a known address exactly as an unknown one; the mail says that there is an account and how to make another shop', async () => {
    const known = await app.makePerson('Kit Known')
    const [asUnknown, asKnown] = [newcomer(), newcomer({ email: known.email })]
    const first = await app.visitor().call(signUp, { body: asUnknown })
    const second = await app.visitor().call(signUp, { body: asKnown })
    expect(second.status).toBe(first.status)
    expect(second.body).toEqual({ sentTo: known.email })
    expect(Object.keys(second.headers).sort()).toEqual(Object.keys(first.headers).sort())

    const mail = app.mailTo(known.email)
    expect(mail.subject).toBe('You already have an account')
    expect(mail.text).toContain('Kit Known')
    expect(mail.text).toContain('make another shop')
    expect(mail.text, 'what a stranger typed does not reach the mail').not.toContain('Nell')
    expect(linksIn(mail)).toEqual(['http://fanlight.test/sign-in'])
    expect((await app.visitor().signIn(known.email, testPassword)).user?.id, 'the old password stays').toBe(known.userId)
  })

  it('does the same work in the database for both: one row with a token that only the unknown address is sent', async () => {
    const known = await app.makePerson()
    await app.visitor().ok(signUp, { body: newcomer({ email: known.email }) })
    expect(await app.database.$count(signUpTable, eq(signUpTable.email, known.email))).toBe(1)
  })

  it('a link works once: the second time it says what to do', async () => {
    const body = newcomer()
    await app.visitor().ok(signUp, { body })
    const token = tokenIn(app.mailTo(body.email))
    await app.visitor().ok(confirmSignUp, { body: { token } })
    const problem = await app.visitor().refused(confirmSignUp, { body: { token } })
    expect(problem).toMatchObject({ status: 410, code: 'link-not-valid' })
    expect(problem.detail).toContain('sign in')
    expect(await app.database.$count(user, eq(user.email, body.email))).toBe(1)
  })

  it('two clicks at the same moment make one person and one shop', async () => {
    const body = newcomer({ shopName: 'Twice at once' })
    await app.visitor().ok(signUp, { body })
    const token = tokenIn(app.mailTo(body.email))
    const answers = await Promise.all([1, 2, 3, 4].map(() => app.visitor().call(confirmSignUp, { body: { token } })))
    expect(answers.map(answer => answer.status).sort()).toEqual([201, 410, 410, 410])
    expect(await app.database.$count(shop, eq(shop.name, 'Twice at once'))).toBe(1)
  })

  it('of two sign-ups of one address the first link followed counts; the other finds the account made', async () => {
    const body = newcomer()
    await app.visitor().ok(signUp, { body })
    const first = tokenIn(app.mailTo(body.email))
    await app.visitor().ok(signUp, { body: { ...body, password: 'another long password' } })
    const second = tokenIn(app.mailTo(body.email))
    await app.visitor().ok(confirmSignUp, { body: { token: second } })
    expect((await app.visitor().refused(confirmSignUp, { body: { token: first } })).detail).toContain('has an account by now')
  })

  it.each([['just before 24 hours', 24 * hour - 60_000, 201], ['just after 24 hours', 24 * hour + 60_000, 410]])('%s the link answers as it should', async (_words, later, status) => {
    const body = newcomer()
    await app.visitor().ok(signUp, { body })
    app.clock.advance(later)
    const answer = await app.visitor().call(confirmSignUp, { body: { token: tokenIn(app.mailTo(body.email)) } })
    app.clock.advance(-later)
    expect(answer.status).toBe(status)
  })

  it('keeps the token only as its hash, and nothing at all once it is too old', async () => {
    const body = newcomer()
    await app.visitor().ok(signUp, { body })
    const token = tokenIn(app.mailTo(body.email))
    expect(token).toMatch(/^[A-Za-z0-9_-]{43}$/)
    const [row] = await app.database.select().from(signUpTable).where(eq(signUpTable.email, body.email))
    expect(JSON.stringify(row)).not.toContain(token)
    await deleteOutdated(app.database, new Date(Date.now() + 23 * hour))
    expect(await app.database.$count(signUpTable, eq(signUpTable.email, body.email))).toBe(1)
    await deleteOutdated(app.database, new Date(Date.now() + 25 * hour))
    expect(await app.database.$count(signUpTable, eq(signUpTable.email, body.email))).toBe(0)
  })

  it('an invented token is refused like an old one', async () => {
    expect((await app.visitor().refused(confirmSignUp, { body: { token: 'A'.repeat(43) } })).code).toBe('link-not-valid')
  })

  it.each([
    ['no address', { email: 'nobody' }, 'body.email'],
    ['an address with a line break', { email: 'a@b.example\nBcc: c@d.example' }, 'body.email'],
    ['an address of 255 characters', { email: `${'a'.repeat(240)}@quillmere.example`.slice(-255) }, 'body.email'],
    ['a name of blanks', { displayName: '   ' }, 'body.displayName'],
    ['a shop name of 121 characters', { shopName: 'x'.repeat(121) }, 'body.shopName'],
    ['a short password', { password: 'eleven char' }, 'body.password'],
  ])('refuses %s at its field', async (_words, changes, path) => {
    const problem = await app.visitor().refused(signUp, { body: newcomer(changes) })
    expect(problem).toMatchObject({ status: 422, code: 'validation-failed' })
    expect(problem.fields?.map(field => field.path)).toEqual([path])
  })

  it('a name with line breaks and an address becomes neither a header nor a line nor a link of the mail', async () => {
    const body = newcomer({ displayName: 'Nell\r\nBcc: victim@quillmere.example\r\n\r\nhttp://elsewhere.example', shopName: 'Shop\nSubject: other' })
    await app.visitor().ok(signUp, { body })
    const mail = app.mailTo(body.email)
    expect(mail.subject).not.toMatch(/[\r\n]/)
    expect(mail.text.split('\n').filter(line => /^(Bcc|Subject):/.test(line))).toEqual([])
    expect(linksIn(mail)).toHaveLength(1)
  })
})
