import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { sql } from 'drizzle-orm'
import { createInvitation, lookUpInvitation } from '#shared/contracts/members.ts'
import { operations } from '#shared/contracts/index.ts'
import { problemSchema } from '#shared/contracts/error.ts'
import { requestPasswordReset, signIn, signUp } from '#shared/contracts/session.ts'
import { networkOf, RateLimits, rateLimitRules } from '#server/middleware/rate-limit.ts'
import { startTestApp, testPassword, type TestAgent, type TestApp } from '#tests/helpers/test-app.ts'

let app: TestApp
beforeAll(async () => {
  // One proxy in front, so that a test can come from several addresses.
  app = await startTestApp({ rateLimitFactor: 1, environment: { TRUSTED_PROXIES: '1' } })
})
beforeEach(() => app.database.execute(sql`delete from rate_limit`))
afterAll(() => app.close())

const from = (ip: string) => ({ headers: { 'X-Forwarded-For': ip } })
const guess = (email: string, ip: string, agent: TestAgent = app.visitor()) => agent.call(signIn, { body: { email, password: 'a wild guess at it' }, ...from(ip) })

describe('guessing a password', () => {
  it('ten tries at one address from one network are answered, the eleventh is asked to wait, by header and sentence', async () => {
    const { email } = await app.makePerson()
    for (let i = 0; i < 10; i++) expect((await guess(email, '192.0.2.1')).status).toBe(401)
    const answer = await guess(email, '192.0.2.1')
    const problem = problemSchema.parse(answer.body)
    expect(problem).toMatchObject({ status: 429, code: 'too-many-requests' })
    const seconds = Number(answer.headers['retry-after'])
    expect(seconds).toBeGreaterThan(890)
    expect(seconds).toBeLessThanOrEqual(900)
    expect(problem.retryAfterSeconds).toBe(seconds)
    expect(problem.detail).toBe('Too many tries. Wait 15 minutes and try again.')
  })

  it('also stops the right password meanwhile, and an unknown address like a known one', async () => {
    const person = await app.makePerson()
    for (const email of [person.email, 'nobody@quillmere.example']) for (let i = 0; i < 10; i++) await guess(email, '192.0.2.1')
    const agent = app.visitor()
    expect((await agent.call(signIn, { body: { email: person.email, password: testPassword }, ...from('192.0.2.1') })).status).toBe(429)
    expect((await guess('nobody@quillmere.example', '192.0.2.1')).status).toBe(429)
  })

  it('does not lock the person out who comes from elsewhere', async () => {
    const person = await app.makePerson()
    for (let i = 0; i < 12; i++) await guess(person.email, '192.0.2.1')
    expect((await app.visitor().call(signIn, { body: { email: person.email, password: testPassword }, ...from('198.51.100.7') })).status).toBe(200)
  })

  it('from many networks at one address is stopped after fifty', async () => {
    const { email } = await app.makePerson()
    const answers: number[] = []
    for (let i = 0; i < 51; i++) answers.push((await guess(email, `192.0.2.${i}`)).status)
    expect(answers.slice(0, 50).every(status => status === 401)).toBe(true)
    expect(answers[50]).toBe(429)
  })

  it('at many addresses from one network is stopped after sixty', async () => {
    const answers: number[] = []
    for (let i = 0; i < 61; i++) answers.push((await guess(`many-${i}@quillmere.example`, '192.0.2.9')).status)
    expect(answers.slice(0, 60).every(status => status === 401)).toBe(true)
    expect(answers[60]).toBe(429)
  })

  it('is forgotten once the right password was given', async () => {
    const person = await app.makePerson()
    for (let round = 0; round < 3; round++) {
      for (let i = 0; i < 8; i++) await guess(person.email, '192.0.2.1')
      expect((await app.visitor().call(signIn, { body: { email: person.email, password: testPassword }, ...from('192.0.2.1') })).status).toBe(200)
    }
  })
})

describe('mails to one address', () => {
  it.each([['sign-ups', signUp, { displayName: 'N', shopName: 'S', password: testPassword }], ['resets', requestPasswordReset, {}]] as const)('are stopped after five %s an hour, for known and unknown addresses', async (_words, operation, rest) => {
    for (const email of [(await app.makePerson()).email, `stranger-${operation.id}@quillmere.example`]) {
      const before = app.mails.length
      for (let i = 0; i < 5; i++) expect((await app.visitor().call(operation, { body: { email, ...rest }, ...from(`192.0.2.${i}`) })).status).toBe(202)
      expect((await app.visitor().call(operation, { body: { email: email.toUpperCase(), ...rest }, ...from('192.0.2.77') })).status).toBe(429)
      expect(app.mails.length - before).toBe(5)
    }
  })

  it('an address of 254 characters is counted like any other', async () => {
    const email = `${'a'.repeat(64)}@${'b'.repeat(60)}.${'c'.repeat(60)}.${'d'.repeat(59)}.example`
    expect(email.length).toBe(254)
    for (let i = 0; i < 5; i++) expect((await app.visitor().call(requestPasswordReset, { body: { email } })).status).toBe(202)
    expect((await app.visitor().call(requestPasswordReset, { body: { email } })).status).toBe(429)
  })

  it('invitations are counted for the person who invites, whatever network they are in', async () => {
    const { owner, shopId } = await app.makeShop()
    const answers: number[] = []
    for (let i = 0; i < 101; i++) answers.push((await owner.agent.call(createInvitation, { params: { shopId }, body: { email: `guest-${i}@quillmere.example`, role: 'viewer' }, ...from(`192.0.2.${i}`) })).status)
    expect(answers.slice(0, 100).every(status => status === 201)).toBe(true)
    expect(answers[100]).toBe(429)
  })
})

describe('guessing a token', () => {
  it('is stopped after 120 look-ups an hour', async () => {
    const agent = app.visitor()
    const answers: number[] = []
    for (let i = 0; i < 121; i++) answers.push((await agent.call(lookUpInvitation, { body: { token: `${'t'.repeat(40)}${i}` } })).status)
    expect(answers.slice(0, 120).every(status => status === 410)).toBe(true)
    expect(answers[120]).toBe(429)
  })
})

describe('the counters', () => {
  it('are shared by two servers, survive a restart, and hold nobody’s address', async () => {
    const email = 'counted@quillmere.example'
    const caller = { address: email, visitor: '192.0.2.1', person: null }
    const [one, two] = [new RateLimits(app.pool, 1), new RateLimits(app.pool, 1)]
    for (let i = 0; i < 5; i++) {
      await one.count('signIn', caller)
      await two.count('signIn', caller)
    }
    await expect(new RateLimits(app.pool, 1).count('signIn', caller)).rejects.toMatchObject({ code: 'too-many-requests' })
    const { rows } = await app.database.execute(sql`select * from rate_limit`)
    expect(rows.length).toBeGreaterThan(0)
    expect(JSON.stringify(rows)).not.toMatch(/counted|192\.0\.2/)
  })

  it('stand only at operations that exist, and let a factor loosen them', async () => {
    expect(operations.map(operation => operation.id)).toEqual(expect.arrayContaining(Object.keys(rateLimitRules)))
    const loose = new RateLimits(app.pool, 10)
    for (let i = 0; i < 50; i++) await loose.count('requestPasswordReset', { address: 'loose@quillmere.example', visitor: '192.0.2.2', person: null })
  })

  it.each([
    ['2001:db8:1:2:3:4:5:6', '2001:db8:1:2'], ['2001:db8::7', '2001:db8:0:0'], ['2001:DB8:1::', '2001:db8:1:0'], ['::1', '0:0:0:0'],
    ['::ffff:192.0.2.5', '192.0.2.5'], ['192.0.2.5', '192.0.2.5'], ['unknown', 'unknown'],
  ])('count %s as the network %s', (ip, network) => {
    expect(networkOf(ip)).toBe(network)
  })
})
