import { setTimeout as wait } from 'node:timers/promises'
import { sql } from 'drizzle-orm'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { connectDatabase, type DatabaseConnection } from '#db/client.ts'
import { isDatabaseAway } from '#server/middleware/errors.ts'
import { createTestDatabase, type TestDatabase } from '#tests/helpers/test-database.ts'

let test: TestDatabase
let connection: DatabaseConnection
beforeEach(async () => {
  test = await createTestDatabase()
  connection = connectDatabase({ url: test.url, connectionsMax: 3 })
})
afterEach(async () => {
  await connection.close()
  await test.drop()
})

const cut = () => test.pool.query('select pg_terminate_backend(pid) from pg_stat_activity where datname = current_database() and pid <> pg_backend_pid()')
const work = () => connection.database.transaction(async transaction => (await transaction.execute<{ one: number }>(sql`select 1 as one`)).rows[0]?.one)

describe('connections that PostgreSQL cuts', () => {
  it('in hand, between two statements of a transaction: the transaction fails, the process and the pool live on', async () => {
    const failure = await connection.database.transaction(async transaction => {
      await transaction.execute(sql`select 1`)
      await cut()
      // Time for the news to arrive while nobody asks.
      await wait(100)
      await transaction.execute(sql`select 2`)
    }).catch((error: unknown) => error)
    expect(isDatabaseAway(failure)).toBe(true)
    expect(await work()).toBe(1)
  })

  it('at any moment, many times over, none is lost to the pool', async () => {
    for (let round = 0; round < 20; round++) {
      await Promise.allSettled([work(), work(), work(), work(), cut(), work(), work()])
    }
    await wait(100)
    expect(await Promise.all(Array.from({ length: 9 }, work))).toEqual(Array.from({ length: 9 }, () => 1))
    expect(connection.pool.totalCount).toBeLessThanOrEqual(3)
    expect(connection.pool.idleCount).toBe(connection.pool.totalCount)
  })

  it('that is dead when a transaction begins is given back to the pool', async () => {
    // All three slots taken by connections whose begin cannot succeed.
    for (let round = 0; round < 6; round++) {
      const client = await connection.pool.connect()
      const query = client.query.bind(client)
      client.query = (() => Promise.reject(Object.assign(new Error('terminating connection'), { code: '57P01' }))) as typeof client.query
      client.release()
      await expect(work()).rejects.toThrow()
      client.query = query
    }
    expect(await work()).toBe(1)
  })

  it('a failed transaction leaves nothing, a nested one only its own part', async () => {
    const { database } = connection
    await database.execute(sql`create table kept (n int)`)
    await expect(database.transaction(async transaction => {
      await transaction.execute(sql`insert into kept values (1)`)
      throw new Error('no')
    })).rejects.toThrow('no')
    await database.transaction(async transaction => {
      await transaction.execute(sql`insert into kept values (2)`)
      await transaction.transaction(async inner => {
        await inner.execute(sql`insert into kept values (3)`)
        throw new Error('inner')
      }).catch(() => {})
    })
    expect((await database.execute(sql`select n from kept`)).rows).toEqual([{ n: 2 }])
  })
})
