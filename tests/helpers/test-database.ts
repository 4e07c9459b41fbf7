import { createHash, randomBytes } from 'node:crypto'
import { readFileSync, readdirSync } from 'node:fs'
import { join } from 'node:path'
import pg from 'pg'
import { connectDatabase, type DatabaseConnection } from '#db/client.ts'
import { migrateDatabase } from '#db/migrate.ts'

/** Any number; keeps two test files from making the template at the same moment. */
const templateLock = 712_554_302
/** Named after the migrations: a cluster that outlives a run holds no template of yesterday's. */
const templateName = `fanlight_template_${migrationsHash()}`

function migrationsHash(): string {
  const folder = join(import.meta.dirname, '../../db/migrations')
  const hash = createHash('sha256')
  for (const file of readdirSync(folder).filter(name => name.endsWith('.sql')).sort()) hash.update(file).update('\0').update(readFileSync(join(folder, file)))
  return hash.digest('hex').slice(0, 12)
}

function serverUrl(): string {
  const url = process.env.TEST_DATABASE_URL
  if (url === undefined || url === '') {
    throw new Error('TEST_DATABASE_URL is not set. Run this file through the test command: npm test -- tests/api/<name>')
  }
  return url
}

function urlOf(name: string): string {
  const url = new URL(serverUrl())
  url.pathname = `/${name}`
  return url.toString()
}

async function withServer<T>(work: (client: pg.Client) => Promise<T>): Promise<T> {
  const client = new pg.Client({ connectionString: serverUrl() })
  await client.connect()
  try {
    return await work(client)
  } finally {
    await client.end()
  }
}

/** Migrated once for a run; copying it takes some 50 ms where migrating takes a second. */
async function makeTemplate(client: pg.Client): Promise<void> {
  await client.query('select pg_advisory_lock($1)', [templateLock])
  try {
    const { rowCount } = await client.query('select 1 from pg_database where datname = $1', [templateName])
    if (rowCount !== 0) return
    // Under another name until it is complete: a run that is broken off leaves no half-migrated template.
    await client.query(`drop database if exists ${templateName}_half`)
    await client.query(`create database ${templateName}_half`)
    await migrateDatabase(urlOf(`${templateName}_half`))
    await client.query(`alter database ${templateName}_half rename to ${templateName}`)
  } finally {
    await client.query('select pg_advisory_unlock($1)', [templateLock])
  }
}

export interface TestDatabase extends DatabaseConnection {
  readonly url: string
  /** Closes the connections and drops the database. */
  drop(): Promise<void>
}

/**
 * A fresh migrated database for one test file.
 *
 * @example
 * const database = await createTestDatabase()
 * afterAll(() => database.drop())
 */
export async function createTestDatabase(): Promise<TestDatabase> {
  const name = `test_${randomBytes(8).toString('hex')}`
  await withServer(async client => {
    await makeTemplate(client)
    // PostgreSQL copies a template only while nobody else copies it.
    await client.query('select pg_advisory_lock($1)', [templateLock])
    await client.query(`create database ${name} template ${templateName}`)
    await client.query('select pg_advisory_unlock($1)', [templateLock])
  })
  const connection = connectDatabase({ url: urlOf(name), connectionsMax: 10 })
  return {
    ...connection,
    url: urlOf(name),
    async drop() {
      await connection.close()
      await withServer(client => client.query(`drop database if exists ${name} with (force)`))
    },
  }
}
