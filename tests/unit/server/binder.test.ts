import { Router } from 'express'
import { pino } from 'pino'
import { describe, expect, it } from 'vitest'
import { connectDatabase } from '#db/client.ts'
import { Binder } from '#server/routes/binder.ts'
import { bindRoutes } from '#server/routes/index.ts'
import { readConfig } from '#server/config.ts'
import type { Dependencies } from '#server/dependencies.ts'
import { operations } from '#shared/contracts/index.ts'
import { getShop } from '#shared/contracts/members.ts'
import { operation } from '#shared/contracts/operation.ts'
import { getSession } from '#shared/contracts/session.ts'

const config = readConfig({ DATABASE_URL: 'postgres://nobody@127.0.0.1:1/nowhere' })
const { database, pool } = connectDatabase({ url: config.databaseUrl })
const dependencies: Dependencies = {
  config, database, pool, logger: pino({ level: 'silent' }), mailQueue: { enqueue: async () => {} }, mailbox: null, demoSignIns: [], clock: () => new Date(), newId: () => '',
}

describe('binding operations to handlers', () => {
  it('every operation of the contracts is implemented', () => {
    expect([...bindRoutes(Router(), dependencies).implemented.keys()].sort()).toEqual(operations.map(one => one.id).sort())
  })

  it('a promised operation without a handler stops the start, with its name', () => {
    const binder = new Binder(Router(), dependencies)
    binder.implement(getSession, async () => ({ csrfToken: '', user: null, memberships: [], mailbox: false, demoSignIns: [] }))
    expect(() => binder.checkComplete([getSession, getShop])).toThrow('not implemented: getShop')
    expect(() => binder.checkComplete([getSession])).not.toThrow()
  })

  it('refuses an operation that the table of rights does not name, one bound twice, and one in a shop without roles', () => {
    const binder = new Binder(Router(), dependencies)
    const stray = operation({ id: 'strayOperation', method: 'get', path: '/api/stray', summary: 'Stray', status: 204 })
    expect(() => binder.implement(stray, async () => {})).toThrow('says nothing about strayOperation')
    binder.implementInShop(getShop, async () => { throw new Error('never called') })
    expect(() => binder.implementInShop(getShop, async () => { throw new Error('never called') })).toThrow('getShop is implemented twice')
    expect(() => binder.implementInShop(getSession, async () => { throw new Error('never called') })).toThrow('no roles')
  })
})
