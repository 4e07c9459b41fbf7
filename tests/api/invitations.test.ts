import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { auditEvent, invitation, membership, user } from '#db/schema/index.ts'
import { acceptInvitation, createInvitation, listInvitations, listMembers, lookUpInvitation, revokeInvitation } from '#shared/contracts/members.ts'
import { linksIn, startTestApp, tokenIn, type TestApp, type TestMember } from '#tests/helpers/test-app.ts'

let app: TestApp
let shopId: string
let owner: TestMember
beforeAll(async () => {
  app = await startTestApp();
  ({ shopId, owner } = await app.makeShop('Bench of invitations'))
})
afterAll(() => app.close())

const day = 86_400_000
const newPerson = { displayName: 'Ivo Invited', password: 'a lens and a lamp' }
let count = 0
const address = () => `invited-${++count}@quillmere.example`
async function invite(email: string, role = 'technician') {
  const made = await owner.agent.ok(createInvitation, { params: { shopId }, body: { email, role } })
  return { made, token: tokenIn(app.mailTo(email)) }
}
const roleOf = async (userId: string) => (await owner.agent.ok(listMembers, { params: { shopId } })).items.find(item => item.userId === userId)?.role ?? null

describe('an invitation', () => {
  it('leaves by mail with the shop, who invites and the role, and is listed until it is accepted', async () => {
    const email = address()
    const { made, token } = await invite(email, 'approver')
    expect(made).toMatchObject({ email, role: 'approver', invitedBy: owner.displayName })
    expect(Date.parse(made.expiresAt) - Date.parse(made.createdAt)).toBe(7 * day)
    const mail = app.mailTo(email)
    expect(mail.text).toContain('Bench of invitations')
    expect(mail.text).toContain(owner.displayName)
    expect(mail.text).toContain('approver')
    expect(linksIn(mail)).toEqual([`http://fanlight.test/invitation?token=${token}`])
    const { items } = await owner.agent.ok(listInvitations, { params: { shopId } })
    expect(items.find(item => item.email === email)).toEqual(made)
  })

  it('says to whoever holds the link what it offers', async () => {
    const email = address()
    const { token } = await invite(email, 'engineer')
    expect(await app.visitor().ok(lookUpInvitation, { body: { token } })).toEqual({ shopName: 'Bench of invitations', email, role: 'engineer', hasAccount: false })
    const known = await app.makePerson()
    const second = await invite(known.email)
    expect((await app.visitor().ok(lookUpInvitation, { body: { token: second.token } })).hasAccount).toBe(true)
  })

  it('makes a new person a member, signed in; the list of open invitations no longer shows it', async () => {
    const email = address()
    const { made, token } = await invite(email, 'engineer')
    const answer = await app.visitor().ok(acceptInvitation, { body: { token, newPerson } })
    expect(answer.user).toMatchObject({ email, displayName: 'Ivo Invited' })
    expect(answer.memberships).toEqual([{ shopId, shopName: 'Bench of invitations', role: 'engineer', demo: false }])
    expect((await app.visitor().signIn(email, newPerson.password)).user?.email).toBe(email)
    expect((await owner.agent.ok(listInvitations, { params: { shopId } })).items.some(item => item.email === email)).toBe(false)
    const events = await app.database.select().from(auditEvent).where(eq(auditEvent.shopId, shopId))
    expect(events.filter(event => event.thingId === made.id || event.thingId === answer.user?.id).map(event => [event.action, event.actorUserId])).toEqual([
      ['invited', owner.userId], ['joined', answer.user?.id],
    ])
  })

  it('makes a known person a member once signed in, without a new password', async () => {
    const person = await app.makePerson()
    const { token } = await invite(person.email)
    const asStranger = await app.visitor().refused(acceptInvitation, { body: { token } })
    expect(asStranger).toMatchObject({ status: 401, code: 'sign-in-required' })
    const agent = await app.signedIn(person)
    expect((await agent.ok(acceptInvitation, { body: { token } })).memberships.map(item => item.shopId)).toContain(shopId)
    expect(await roleOf(person.userId)).toBe('technician')
  })

  it('never lets a stranger with the link set the password of a known person', async () => {
    const person = await app.makePerson()
    const before = await app.database.select().from(user).where(eq(user.id, person.userId))
    const { token } = await invite(person.email)
    expect((await app.visitor().refused(acceptInvitation, { body: { token, newPerson } })).code).toBe('sign-in-required')
    expect(await app.database.select().from(user).where(eq(user.id, person.userId))).toEqual(before)
    expect(await roleOf(person.userId)).toBeNull()
  })

  it('is refused to somebody else who is signed in, with both addresses said', async () => {
    const [invited, other] = [await app.makePerson(), await app.makePerson()]
    const { token } = await invite(invited.email)
    const agent = await app.signedIn(other)
    const problem = await agent.refused(acceptInvitation, { body: { token } })
    expect(problem.code).toBe('not-allowed')
    expect(problem.detail).toContain(invited.email)
    expect(problem.detail).toContain(other.email)
    expect(await roleOf(other.userId)).toBeNull()
    expect((await app.visitor().ok(lookUpInvitation, { body: { token } })).email, 'it stays open').toBe(invited.email)
  })

  it('asks a new person for name and password at the right field', async () => {
    const { token } = await invite(address())
    const problem = await app.visitor().refused(acceptInvitation, { body: { token } })
    expect(problem).toMatchObject({ status: 422, fields: [{ path: 'body.newPerson' }] })
  })

  it('works once, also for four who accept at the same moment', async () => {
    const email = address()
    const { token } = await invite(email)
    const answers = await Promise.all([1, 2, 3, 4].map(() => app.visitor().call(acceptInvitation, { body: { token, newPerson } })))
    expect(answers.filter(answer => answer.status === 200)).toHaveLength(1)
    for (const answer of answers) expect([200, 401, 410]).toContain(answer.status)
    expect(await app.database.$count(user, eq(user.email, email))).toBe(1)
    expect((await app.visitor().refused(lookUpInvitation, { body: { token } })).code).toBe('link-not-valid')
  })

  it('a new one to the same address replaces the open one', async () => {
    const email = address()
    const first = await invite(email, 'viewer')
    const second = await invite(email, 'engineer')
    expect((await app.visitor().refused(acceptInvitation, { body: { token: first.token, newPerson } })).code).toBe('link-not-valid')
    expect((await owner.agent.ok(listInvitations, { params: { shopId } })).items.filter(item => item.email === email).map(item => item.role)).toEqual(['engineer'])
    expect((await app.visitor().ok(acceptInvitation, { body: { token: second.token, newPerson } })).memberships[0]?.role).toBe('engineer')
  })

  it('two owners who invite the same address at the same moment leave one open invitation', async () => {
    const email = address()
    const second = await app.makeMember(shopId, 'owner')
    const answers = await Promise.all([owner, second].map(({ agent }) => agent.call(createInvitation, { params: { shopId }, body: { email, role: 'viewer' } })))
    expect(answers.map(answer => answer.status)).toEqual([201, 201])
    expect((await owner.agent.ok(listInvitations, { params: { shopId } })).items.filter(item => item.email === email)).toHaveLength(1)
  })

  it.each([['6 days and 23 hours', 7 * day - 3_600_000, 200], ['7 days and an hour', 7 * day + 3_600_000, 410]])('after %s it answers as it should', async (_words, later, status) => {
    const email = address()
    const { token } = await invite(email)
    app.clock.advance(later)
    try {
      expect((await app.visitor().call(lookUpInvitation, { body: { token } })).status).toBe(status)
      expect((await owner.agent.ok(listInvitations, { params: { shopId } })).items.some(item => item.email === email)).toBe(status === 200)
      expect((await app.visitor().call(acceptInvitation, { body: { token, newPerson } })).status).toBe(status)
    } finally {
      app.clock.advance(-later)
    }
  })

  it('taken back it opens nothing any more; taking it back twice, or from another shop, finds nothing', async () => {
    const email = address()
    const { made, token } = await invite(email)
    const other = await app.makeShop()
    expect((await other.owner.agent.refused(revokeInvitation, { params: { shopId: other.shopId, invitationId: made.id } })).code).toBe('not-found')
    await owner.agent.ok(revokeInvitation, { params: { shopId, invitationId: made.id } })
    expect((await app.visitor().refused(acceptInvitation, { body: { token, newPerson } })).code).toBe('link-not-valid')
    expect((await owner.agent.refused(revokeInvitation, { params: { shopId, invitationId: made.id } })).code).toBe('not-found')
    expect(await app.database.$count(user, eq(user.email, email))).toBe(0)
  })

  it('to somebody who belongs to the shop is refused; after leaving they can be invited again', async () => {
    const member = await app.makeMember(shopId, 'viewer')
    const body = { email: member.email.toUpperCase(), role: 'engineer' }
    expect((await owner.agent.refused(createInvitation, { params: { shopId }, body })).code).toBe('already-member')
    await app.database.delete(membership).where(eq(membership.userId, member.userId))
    const { token } = await invite(member.email, 'engineer')
    await member.agent.ok(acceptInvitation, { body: { token } })
    expect(await roleOf(member.userId)).toBe('engineer')
  })

  it('keeps the token only as its hash', async () => {
    const { made, token } = await invite(address())
    const rows = await app.database.select().from(invitation).where(eq(invitation.id, made.id))
    expect(rows[0]?.tokenHash).toMatch(/^[0-9a-f]{64}$/)
    expect(JSON.stringify(rows)).not.toContain(token)
  })
})
