import { fileURLToPath } from 'node:url'
import { migrate } from 'drizzle-orm/node-postgres/migrator'
import { drizzle } from 'drizzle-orm/node-postgres'
import pg from 'pg'

/** Any number, the same in every server of one deployment: two servers that start together migrate once. */
const migrationLock = 712_554_301

/** Brings the schema up to date; safe to call from several servers at once. */
export async function migrateDatabase(url: string): Promise<void> {
  const client = new pg.Client({ connectionString: url })
  await client.connect()
  try {
    await client.query('select pg_advisory_lock($1)', [migrationLock])
    await migrate(drizzle(client), { migrationsFolder: fileURLToPath(new URL('./migrations', import.meta.url)) })
    await client.query('select pg_advisory_unlock($1)', [migrationLock])
  } finally {
    await client.end()
  }
}
