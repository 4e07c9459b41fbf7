import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { access } from '#server/routes/access.ts'
import { roles, type Role } from '#shared/contracts/common.ts'
import { listCaughtMail } from '#shared/contracts/development.ts'
import { problemSchema } from '#shared/contracts/error.ts'
import { operations } from '#shared/contracts/index.ts'
import type { Operation } from '#shared/contracts/operation.ts'
import { plainImportMapping } from '#tests/helpers/film-shop.ts'
import { startTestApp, type TestAnswer, type TestApp, type TestMember } from '#tests/helpers/test-app.ts'
import { makeWholeShop, type WholeShop } from '#tests/helpers/whole-shop.ts'

let app: TestApp
let here: WholeShop
let there: WholeShop
const members = new Map<Role, TestMember>()
beforeAll(async () => {
  app = await startTestApp()
  here = await makeWholeShop(app, 'Here')
  there = await makeWholeShop(app, 'Yonder')
  for (const role of roles) members.set(role, await app.makeMember(here.shopId, role))
})
afterAll(() => app.close())

const inShop = operations.filter(operation => operation.path.includes('/:shopId'))
const rolesOf = (operation: Operation): readonly Role[] => {
  const rights = access[operation.id]
  return Array.isArray(rights) ? rights : []
}
const memberWith = (role: Role): TestMember => {
  const member = members.get(role)
  if (member === undefined) throw new Error(`no ${role}`)
  return member
}
const operationNamed = (id: string): Operation => {
  const found = operations.find(operation => operation.id === id)
  if (found === undefined) throw new Error(id)
  return found
}
const codeOf = (answer: TestAnswer) => (answer.status < 400 ? null : problemSchema.parse(answer.body).code)

/** Everything a shop holds, as text: to see that nothing moved. */
async function contentsOf(shopId: string): Promise<string> {
  const tables = ['membership', 'invitation', 'printer', 'resin', 'lot', 'pairing', 'study', 'film_reading', 'import_batch', 'import_mapping', 'audit_event', 'fit']
  const found = await Promise.all([
    app.database.execute(sql`select * from shop where id = ${shopId}`),
    ...tables.map(table => app.database.execute(sql`select * from ${sql.identifier(table)} where shop_id = ${shopId} order by 1, 2`)),
  ])
  return JSON.stringify(found.map(result => result.rows))
}

describe('the table of rights', () => {
  it('names every operation of the contracts, and no other', () => {
    expect(Object.keys(access).sort()).toEqual(operations.map(operation => operation.id).sort())
  })

  it('gives roles to exactly those operations that lie in a shop', () => {
    for (const operation of operations) expect([operation.id, Array.isArray(access[operation.id])]).toEqual([operation.id, inShop.includes(operation)])
  })

  it('lets an owner do everything in a shop, and a viewer change nothing but their own membership', () => {
    for (const operation of inShop) expect(rolesOf(operation), operation.id).toContain('owner')
    const writes = inShop.filter(operation => operation.method !== 'get' && rolesOf(operation).includes('viewer'))
    expect(writes.map(operation => operation.id)).toEqual(['removeMember'])
  })
})

describe.each(inShop.map(operation => [operation.id, operation] as const))('%s', (_id, operation) => {
  it.each(roles)('as %s', async role => {
    // Leaving is everybody's right; a member of their own for it, since it ends what follows.
    const member = operation.id === 'removeMember' ? await app.makeMember(here.shopId, role) : memberWith(role)
    const answer = await member.agent.call(operation, { params: { ...here.params, userId: member.userId }, body: operation.body === undefined ? undefined : {} })
    const code = codeOf(answer)
    if (rolesOf(operation).includes(role)) {
      expect([401, 403], `${answer.status} ${answer.text.slice(0, 200)}`).not.toContain(answer.status)
      expect(answer.status).toBeLessThan(500)
    } else {
      expect([answer.status, code]).toEqual([403, 'not-allowed'])
    }
  })

  it.each(roles)('as %s of another shop it answers as for a shop that does not exist', async role => {
    const before = await contentsOf(there.shopId)
    const given = { version: 1, body: there.bodies[operation.id] }
    const foreign = await memberWith(role).agent.call(operation, { ...given, params: there.params })
    const nowhere = await memberWith(role).agent.call(operation, { ...given, params: { ...there.params, shopId: '01890000-0000-7000-8000-000000000000' } })
    expect([foreign.status, codeOf(foreign)]).toEqual([404, 'not-found'])
    expect({ ...problemSchema.parse(foreign.body), requestId: '' }).toEqual({ ...problemSchema.parse(nowhere.body), requestId: '' })
    expect(await contentsOf(there.shopId)).toBe(before)
  })

  it('signed out', async () => {
    const answer = await app.visitor().call(operation, { params: here.params, version: 1, body: here.bodies[operation.id] })
    expect([answer.status, codeOf(answer)]).toEqual([401, 'sign-in-required'])
  })

  if (operation.method === 'get') {
    it('answers from its own shop alone', async () => {
      const answer = await here.owner.agent.call(operation, { params: here.params })
      expect(answer.status, answer.text.slice(0, 300)).toBe(200)
      for (const [name, id] of Object.entries(there.params)) expect(answer.text, name).not.toContain(id)
    })
  }

  if (/:shopId.*:/.test(operation.path)) {
    it('does not reach a thing of another shop through one’s own shop', async () => {
      const before = await contentsOf(there.shopId)
      const answer = await here.owner.agent.call(operation, { params: { ...there.params, shopId: here.shopId }, version: 1, body: here.bodies[operation.id] })
      expect(answer.status, answer.text.slice(0, 300)).toBeGreaterThanOrEqual(400)
      expect(answer.status).toBeLessThan(500)
      if (operation.method === 'get') expect(codeOf(answer)).toBe('not-found')
      expect(await contentsOf(there.shopId)).toBe(before)
    })
  }
})

describe('what a shop remembers of its files', () => {
  it('is not told to another shop with the same header', async () => {
    const header = ['exposure of yonder', 'thickness of yonder']
    const [importFile, find] = [operationNamed('importFilmReadings'), operationNamed('findImportMapping')]
    const made = await there.owner.agent.call(importFile, {
      params: { ...there.params, batchId: '01890000-0000-7000-8000-000000000001' }, body: `${header.join(',')}\n5,0.5\n`, headers: { 'Content-Type': 'text/csv' },
      query: { fileName: 'yonder.csv', mapping: JSON.stringify(plainImportMapping), header: JSON.stringify(header) },
    })
    expect(made.status, made.text).toBe(201)
    expect((await there.owner.agent.call(find, { params: there.params, body: { header } })).body).toEqual({ mapping: plainImportMapping })
    expect((await here.owner.agent.call(find, { params: here.params, body: { header } })).body).toEqual({ mapping: null })
  })
})

describe('references in a body to things of another shop', () => {
  it.each(['createLot', 'createPairing', 'createStudy', 'updateStudy'])('%s refuses them', async id => {
    const operation = operationNamed(id)
    const answer = await here.owner.agent.call(operation, { params: here.params, version: 1, body: there.bodies[id] })
    expect(answer.status, answer.text).toBe(422)
    expect(answer.text).not.toContain('Yonder')
  })
})

describe('outside a shop', () => {
  const others = operations.filter(operation => !inShop.includes(operation))
  it.each(others.filter(operation => access[operation.id] === 'signed-in').map(operation => [operation.id, operation] as const))('%s is for the signed in', async (_id, operation) => {
    expect(codeOf(await app.visitor().call(operation, { body: {} }))).toBe('sign-in-required')
    const agent = await app.signedIn(await app.makePerson())
    expect([401, 403]).not.toContain((await agent.call(operation, { body: {} })).status)
  })

  it.each(others.filter(operation => access[operation.id] === 'public').map(operation => [operation.id, operation] as const))('%s is for everybody', async (_id, operation) => {
    const answer = await app.visitor().call(operation, { body: operation.body === undefined ? undefined : {} })
    expect([401, 403, 404]).not.toContain(answer.status)
    expect(answer.status).toBeLessThan(500)
  })

  it('caught mail exists only where mail is caught', async () => {
    expect((await app.visitor().ok(listCaughtMail)).items).toEqual([])
    const real = await startTestApp({ change: { mailbox: null } })
    try {
      expect((await real.visitor().refused(listCaughtMail)).code).toBe('not-found')
      expect((await real.visitor().session()).mailbox).toBe(false)
    } finally {
      await real.close()
    }
  })

  it('a person who was deleted while signed in is signed out', async () => {
    const person = await app.makePerson()
    const agent = await app.signedIn(person)
    await app.database.execute(sql`delete from "user" where id = ${person.userId}`)
    expect((await agent.session()).user).toBeNull()
    expect((await agent.refused(operationNamed('getShop'), { params: here.params })).code).toBe('sign-in-required')
  })
})
