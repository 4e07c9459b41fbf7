import argon2 from 'argon2'
import { eq, sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest'
import { auditEvent, session, user } from '#db/schema/index.ts'
import { createShop } from '#shared/contracts/members.ts'
import { changePassword, getSession, signIn, signUp, updateAccount } from '#shared/contracts/session.ts'
import { startTestApp, testPassword, type TestApp } from '#tests/helpers/test-app.ts'

let app: TestApp
beforeAll(async () => {
  app = await startTestApp()
})
afterAll(() => app.close())

const cookieNamed = (cookies: readonly string[], name: string) => cookies.find(line => line.startsWith(`${name}=`)) ?? ''

describe('signing in', () => {
  it('answers who one is and in which shops with which role', async () => {
    const { owner, shopId } = await app.makeShop('North bench')
    const answer = await owner.agent.session()
    expect(answer.user).toEqual({ id: owner.userId, email: owner.email, displayName: owner.displayName })
    expect(answer.memberships).toEqual([{ shopId, shopName: 'North bench', role: 'owner', demo: false }])
  })

  it('takes an address in capitals and with spaces around it', async () => {
    const person = await app.makePerson()
    const answer = await app.visitor().signIn(`  ${person.email.toUpperCase()} `, testPassword)
    expect(answer.user?.id).toBe(person.userId)
  })

  it('answers a wrong password and an unknown address alike, to the letter', async () => {
    const person = await app.makePerson()
    const wrong = await app.visitor().refused(signIn, { body: { email: person.email, password: 'not the right one' } })
    const unknown = await app.visitor().refused(signIn, { body: { email: 'nobody@quillmere.example', password: 'not the right one' } })
    expect({ ...wrong, requestId: '' }).toEqual({ ...unknown, requestId: '' })
    expect(wrong).toMatchObject({ status: 401, code: 'wrong-credentials' })
  })

  it('keeps only a hash of the password, by argon2id with 19 MiB', async () => {
    const { email } = await app.makePerson()
    const [row] = await app.database.select().from(user).where(eq(user.email, email))
    expect(row?.passwordHash).toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$/)
    expect(row?.passwordHash).not.toContain(testPassword)
  })

  it('gives a session id that the browser did not have before: a planted one is never signed in', async () => {
    const person = await app.makePerson()
    const agent = app.visitor()
    await agent.signIn(person.email, testPassword)
    const [before] = await app.database.select({ sid: session.sid }).from(session).where(eq(session.sid, await sidOf(person.userId)))
    const again = await agent.call(signIn, { body: { email: person.email, password: testPassword } })
    const after = cookieNamed(again.cookies, 'fanlight.sid')
    expect(after).not.toBe('')
    expect(decodeURIComponent(after)).not.toContain(before?.sid ?? 'none')
    expect(await app.database.$count(session, eq(session.sid, before?.sid ?? ''))).toBe(0)
  })

  it('sets cookies that scripts cannot read, that other sites do not send, and that nobody can make up', async () => {
    const person = await app.makePerson()
    const agent = app.visitor()
    const first = await agent.call(getSession)
    expect(cookieNamed(first.cookies, 'fanlight.csrf')).toMatch(/; HttpOnly; SameSite=Lax$/)
    expect(cookieNamed(first.cookies, 'fanlight.sid'), 'nobody is stored before signing in').toBe('')
    const { cookies } = await agent.call(signIn, { body: { email: person.email, password: testPassword } })
    expect(cookieNamed(cookies, 'fanlight.sid')).toMatch(/; Path=\/; Expires=[^;]+; HttpOnly; SameSite=Lax$/)

    const forged = app.visitor()
    forged.raw.jar.setCookie(`fanlight.sid=s%3A${await sidOf(person.userId)}.wrongsignature; Path=/`, '127.0.0.1')
    expect((await forged.session()).user).toBeNull()
  })
})

async function sidOf(userId: string): Promise<string> {
  const rows = await app.database.select().from(session)
  const found = rows.find(row => JSON.stringify(row.sess).includes(userId))
  return found?.sid ?? ''
}

describe('where people come by HTTPS', () => {
  it('cookies travel by HTTPS only, and the proxy in front says so', async () => {
    const secure = await startTestApp({ environment: { PUBLIC_URL: 'https://fanlight.test', NODE_ENV: 'production', SMTP_URL: 'smtp://127.0.0.1:1' } })
    try {
      const person = await secure.makePerson()
      const agent = secure.visitor()
      const headers = { 'X-Forwarded-Proto': 'https' }
      const first = await agent.raw.get('/api/session').set(headers)
      const csrfLine = String(first.headers['set-cookie'])
      expect(csrfLine).toMatch(/; Secure/)
      const answer = await agent.raw.post('/api/session').set(headers).set('Cookie', csrfLine.split(';')[0] ?? '').set('X-CSRF-Token', first.body.csrfToken)
        .send({ email: person.email, password: testPassword })
      expect(answer.status).toBe(200)
      expect(String(answer.headers['set-cookie'])).toMatch(/fanlight\.sid=[^;]+; Path=\/; Expires=[^;]+; HttpOnly; Secure; SameSite=Lax/)
      expect(first.headers['strict-transport-security']).toMatch(/max-age=\d{7,}/)
    } finally {
      await secure.close()
    }
  })
})

describe('signing out', () => {
  it('ends the session on the server too: the old cookie opens nothing', async () => {
    const { owner } = await app.makeShop()
    const sid = await sidOf(owner.userId)
    const answer = await owner.agent.signOut()
    expect(answer.user).toBeNull()
    expect(answer.memberships).toEqual([])
    expect(await app.database.$count(session, eq(session.sid, sid))).toBe(0)
    expect((await owner.agent.refused(createShop, { body: { name: 'Another' } })).code).toBe('sign-in-required')
  })

  it('answers the same to somebody who is not signed in', async () => {
    expect((await app.visitor().signOut()).user).toBeNull()
  })
})

describe('the own account', () => {
  it('a new name stands in the session, in the audit of each of the person’s shops, and with blanks cut off', async () => {
    const { owner, shopId } = await app.makeShop()
    const answer = await owner.agent.ok(updateAccount, { body: { displayName: '  Ada of the bench ' } })
    expect(answer.user?.displayName).toBe('Ada of the bench')
    const events = await app.database.select().from(auditEvent).where(eq(auditEvent.shopId, shopId))
    expect(events.map(({ action, thing, thingId, before, after }) => ({ action, thing, thingId, before, after }))).toEqual([
      { action: 'renamed', thing: 'person', thingId: owner.userId, before: { displayName: owner.displayName }, after: { displayName: 'Ada of the bench' } },
    ])
  })

  it('a new password ends the other sessions and keeps this one', async () => {
    const person = await app.makePerson()
    const [here, elsewhere] = [await app.signedIn(person), await app.signedIn(person)]
    const newPassword = 'a lamp with a new bulb'
    const answer = await here.ok(changePassword, { body: { currentPassword: testPassword, newPassword } })
    expect(answer.user?.id).toBe(person.userId)
    expect((await elsewhere.session()).user).toBeNull()
    expect((await here.session()).user?.id).toBe(person.userId)
    expect((await app.visitor().refused(signIn, { body: { email: person.email, password: testPassword } })).code).toBe('wrong-credentials')
    expect((await app.visitor().signIn(person.email, newPassword)).user?.id).toBe(person.userId)
  })

  it('a wrong current password is refused at its field and changes nothing', async () => {
    const person = await app.makePerson()
    const agent = await app.signedIn(person)
    const problem = await agent.refused(changePassword, { body: { currentPassword: 'guessed', newPassword: 'a lamp with a new bulb' } })
    expect(problem).toMatchObject({ status: 401, code: 'wrong-credentials', fields: [{ path: 'body.currentPassword' }] })
    expect((await app.visitor().signIn(person.email, testPassword)).user?.id).toBe(person.userId)
  })

  it.each([['eleven characters', 'x'.repeat(11)], ['two hundred and one', 'x'.repeat(201)]])('refuses a new password of %s', async (_words, newPassword) => {
    const agent = await app.signedIn(await app.makePerson())
    const problem = await agent.refused(changePassword, { body: { currentPassword: testPassword, newPassword } })
    expect(problem).toMatchObject({ status: 422, fields: [{ path: 'body.newPassword' }] })
  })

  it('an accent typed as one character or as two is the same password', async () => {
    const person = await app.makePerson()
    const agent = await app.signedIn(person)
    await agent.ok(changePassword, { body: { currentPassword: testPassword, newPassword: 'caf\u00e9 with a view' } })
    expect((await app.visitor().signIn(person.email, 'cafe\u0301 with a view')).user?.id).toBe(person.userId)
  })
})

describe('further shops', () => {
  it('belong to who made them, as owner, with a line in their audit', async () => {
    const agent = await app.signedIn(await app.makePerson())
    const answer = await agent.ok(createShop, { body: { name: 'Second shop' } })
    expect(answer.memberships.map(({ shopName, role }) => ({ shopName, role }))).toEqual([{ shopName: 'Second shop', role: 'owner' }])
    const events = await app.database.select().from(auditEvent).where(eq(auditEvent.shopId, answer.memberships[0]?.shopId ?? ''))
    expect(events.map(event => [event.action, event.thing, event.actorUserId])).toEqual([['created', 'shop', answer.user?.id]])
  })
})

describe('the time it takes', () => {
  it('tells nothing: known and unknown addresses cost one check of a password to sign in, one hash to sign up', async () => {
    const person = await app.makePerson()
    const verify = vi.spyOn(argon2, 'verify')
    const hash = vi.spyOn(argon2, 'hash')
    const [mine, nobody] = [app.visitor(), app.visitor()]
    for (const [agent, email] of [[mine, person.email], [nobody, 'unknown@quillmere.example']] as const) {
      verify.mockClear()
      hash.mockClear()
      await agent.refused(signIn, { body: { email, password: 'not the right one' } })
      expect([verify.mock.calls.length, hash.mock.calls.length], email).toEqual([1, 0])
      expect(verify.mock.calls[0]?.[0], 'the same strength').toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$/)
      await agent.ok(signUp, { body: { email, displayName: 'N', shopName: 'S', password: testPassword } })
      expect([verify.mock.calls.length, hash.mock.calls.length], email).toEqual([1, 1])
    }
    verify.mockRestore()
    hash.mockRestore()
  })
})

describe('a session', () => {
  it('lasts thirty days from the last day it was used, and is written once a day', async () => {
    const person = await app.makePerson()
    const agent = await app.signedIn(person)
    const sid = await sidOf(person.userId)
    const expiry = async () => (await app.database.select({ expire: session.expire }).from(session).where(eq(session.sid, sid)))[0]?.expire
    const daysAhead = ((await expiry())?.getTime() ?? 0) - Date.now()
    expect(daysAhead / 86_400_000).toBeCloseTo(30, 1)

    expect((await agent.call(getSession)).cookies.filter(line => line.startsWith('fanlight.sid')), 'later the same day').toEqual([])
    await app.database.update(session).set({ sess: sql`jsonb_set(${session.sess}::jsonb, '{touchedOn}', '"2026-01-01"')::json`, expire: new Date(Date.now() + 86_400_000) }).where(eq(session.sid, sid))
    const answer = await agent.call(getSession)
    expect(cookieNamed(answer.cookies, 'fanlight.sid')).toMatch(/; Expires=/)
    expect((((await expiry())?.getTime() ?? 0) - Date.now()) / 86_400_000).toBeCloseTo(30, 1)
  })

  it('whose time is over opens nothing', async () => {
    const person = await app.makePerson()
    const agent = await app.signedIn(person)
    await app.database.update(session).set({ expire: new Date(Date.now() - 1000) }).where(eq(session.sid, await sidOf(person.userId)))
    expect((await agent.session()).user).toBeNull()
  })
})
