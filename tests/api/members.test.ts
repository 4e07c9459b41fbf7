import { and, eq } from 'drizzle-orm'
import { v7 } from 'uuid'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { auditEvent, membership } from '#db/schema/index.ts'
import { roles } from '#shared/contracts/common.ts'
import { changeMemberRole, getShop, listMembers, removeMember, renameShop } from '#shared/contracts/members.ts'
import { startTestApp, type TestApp } from '#tests/helpers/test-app.ts'

let app: TestApp
beforeAll(async () => {
  app = await startTestApp()
})
afterAll(() => app.close())

const owners = (shopId: string) => app.database.$count(membership, and(eq(membership.shopId, shopId), eq(membership.role, 'owner')))
async function history(shopId: string) {
  const events = await app.database.select().from(auditEvent).where(eq(auditEvent.shopId, shopId)).orderBy(auditEvent.at)
  return events.map(({ action, thing, thingId, actorUserId, before, after }) => ({ action, thing, thingId, actorUserId, before, after }))
}

describe('the shop', () => {
  it('is renamed by its owner on the version that was seen, with both names in the audit', async () => {
    const { shopId, owner } = await app.makeShop('Old name')
    const params = { shopId }
    expect(await owner.agent.ok(getShop, { params })).toMatchObject({ name: 'Old name', version: 1, demo: false })
    const answer = await owner.agent.call(renameShop, { params, version: 1, body: { name: 'New name' } })
    expect(answer.body).toMatchObject({ name: 'New name', version: 2 })
    expect(answer.headers.etag).toBe('"2"')
    expect(await history(shopId)).toEqual([
      { action: 'renamed', thing: 'shop', thingId: shopId, actorUserId: owner.userId, before: { name: 'Old name' }, after: { name: 'New name' } },
    ])
  })

  it('refuses a rename on a stale version with the shop as it stands, and one without a version', async () => {
    const { shopId, owner } = await app.makeShop('Old name')
    await owner.agent.ok(renameShop, { params: { shopId }, version: 1, body: { name: 'First' } })
    const problem = await owner.agent.refused(renameShop, { params: { shopId }, version: 1, body: { name: 'Second' } })
    expect(problem).toMatchObject({ status: 412, code: 'stale-edit', current: { name: 'First', version: 2 } })
    expect((await owner.agent.refused(renameShop, { params: { shopId }, body: { name: 'Second' } })).code).toBe('if-match-required')
    expect((await owner.agent.ok(getShop, { params: { shopId } })).name).toBe('First')
  })
})

describe('members', () => {
  it('are listed to everybody in the shop, by name, each with role and day', async () => {
    const { shopId, owner } = await app.makeShop()
    const person = await app.makePerson('Aa First')
    const viewer = await app.makeMember(shopId, 'viewer', person)
    const { items } = await viewer.agent.ok(listMembers, { params: { shopId } })
    expect(items.map(({ userId, role, email }) => ({ userId, role, email }))).toEqual([
      { userId: viewer.userId, role: 'viewer', email: viewer.email }, { userId: owner.userId, role: 'owner', email: owner.email },
    ])
  })

  it.each(roles)('can be made %s, which counts from the next call on', async role => {
    const { shopId, owner } = await app.makeShop()
    const member = await app.makeMember(shopId, role === 'viewer' ? 'technician' : 'viewer')
    const answer = await owner.agent.ok(changeMemberRole, { params: { shopId, userId: member.userId }, body: { role } })
    expect(answer).toMatchObject({ userId: member.userId, role })
    expect((await member.agent.session()).memberships.map(item => item.role)).toEqual([role])
    expect(await history(shopId)).toEqual([{
      action: 'role changed', thing: 'member', thingId: member.userId, actorUserId: owner.userId, before: { role: role === 'viewer' ? 'technician' : 'viewer' }, after: { role },
    }])
  })

  it('have a role in each shop: a change in one leaves the other', async () => {
    const [{ shopId, owner }, other] = [await app.makeShop(), await app.makeShop()]
    const member = await app.makeMember(shopId, 'viewer')
    await app.database.insert(membership).values({ shopId: other.shopId, userId: member.userId, role: 'technician' })
    await owner.agent.ok(changeMemberRole, { params: { shopId, userId: member.userId }, body: { role: 'engineer' } })
    const { memberships } = await member.agent.session()
    expect(new Map(memberships.map(item => [item.shopId, item.role]))).toEqual(new Map([[shopId, 'engineer'], [other.shopId, 'technician']]))
  })

  it('the same role again changes nothing and writes no history', async () => {
    const { shopId, owner } = await app.makeShop()
    const member = await app.makeMember(shopId, 'viewer')
    await owner.agent.ok(changeMemberRole, { params: { shopId, userId: member.userId }, body: { role: 'viewer' } })
    expect(await history(shopId)).toEqual([])
  })

  it('the only owner can neither step down nor leave; with a second one both work', async () => {
    const { shopId, owner } = await app.makeShop()
    const params = { shopId, userId: owner.userId }
    await app.makeMember(shopId, 'engineer')
    for (const problem of [await owner.agent.refused(changeMemberRole, { params, body: { role: 'viewer' } }), await owner.agent.refused(removeMember, { params })]) {
      expect(problem).toMatchObject({ status: 409, code: 'last-owner' })
      expect(problem.detail).toContain(owner.displayName)
    }
    await app.makeMember(shopId, 'owner')
    await owner.agent.ok(changeMemberRole, { params, body: { role: 'viewer' } })
    await owner.agent.ok(removeMember, { params })
    expect(await owners(shopId)).toBe(1)
  })

  it('owners who demote or remove each other at the same moment leave one owner', async () => {
    for (let round = 0; round < 5; round++) {
      const { shopId, owner } = await app.makeShop()
      const others = [await app.makeMember(shopId, 'owner'), await app.makeMember(shopId, 'owner')]
      const all = [owner, ...others]
      await Promise.all(all.flatMap((actor, i) => {
        const target = { params: { shopId, userId: all[(i + 1) % all.length]?.userId ?? '' } }
        return [actor.agent.call(changeMemberRole, { ...target, body: { role: 'viewer' } }), actor.agent.call(removeMember, target)]
      }))
      expect(await owners(shopId)).toBeGreaterThanOrEqual(1)
    }
  })

  it('an owner who was demoted while waiting in line may not demote any more', async () => {
    const { shopId, owner } = await app.makeShop()
    const second = await app.makeMember(shopId, 'owner')
    await app.makeMember(shopId, 'owner')
    const answers = await Promise.all([
      owner.agent.call(changeMemberRole, { params: { shopId, userId: second.userId }, body: { role: 'viewer' } }),
      second.agent.call(changeMemberRole, { params: { shopId, userId: owner.userId }, body: { role: 'viewer' } }),
    ])
    expect(answers.map(answer => answer.status).sort()).toEqual([200, 403])
    expect(await owners(shopId)).toBe(2)
  })

  it('a removed member is no longer let in, and keeps their account and other shops', async () => {
    const { shopId, owner } = await app.makeShop()
    const member = await app.makeMember(shopId, 'technician')
    const other = await app.makeShop('Other shop')
    await app.database.insert(membership).values({ shopId: other.shopId, userId: member.userId, role: 'viewer' })
    await owner.agent.ok(removeMember, { params: { shopId, userId: member.userId } })
    expect((await member.agent.refused(getShop, { params: { shopId } })).code).toBe('not-found')
    const { user, memberships } = await member.agent.session()
    expect(user?.id).toBe(member.userId)
    expect(memberships.map(item => item.shopId)).toEqual([other.shopId])
    expect(await history(shopId)).toEqual([{
      action: 'removed', thing: 'member', thingId: member.userId, actorUserId: owner.userId, before: { role: 'technician', email: member.email }, after: null,
    }])
  })

  it.each(roles.filter(role => role !== 'owner'))('as %s one can leave but not remove others', async role => {
    const { shopId, owner } = await app.makeShop()
    const [member, colleague] = [await app.makeMember(shopId, role), await app.makeMember(shopId, 'viewer')]
    for (const userId of [colleague.userId, owner.userId]) {
      expect((await member.agent.refused(removeMember, { params: { shopId, userId } })).code).toBe('not-allowed')
    }
    await member.agent.ok(removeMember, { params: { shopId, userId: member.userId } })
    expect((await member.agent.refused(getShop, { params: { shopId } })).code).toBe('not-found')
  })

  it('members of another shop, and people who do not exist, are not found', async () => {
    const { shopId, owner } = await app.makeShop()
    const other = await app.makeShop()
    for (const userId of [other.owner.userId, v7()]) {
      expect((await owner.agent.refused(changeMemberRole, { params: { shopId, userId }, body: { role: 'viewer' } })).code).toBe('not-found')
      expect((await owner.agent.refused(removeMember, { params: { shopId, userId } })).code).toBe('not-found')
    }
    expect(await owners(other.shopId)).toBe(1)
  })
})
