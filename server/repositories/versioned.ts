import { and, eq, sql, type SQL } from 'drizzle-orm'
import type { PgColumn, PgTable } from 'drizzle-orm/pg-core'
import type { Executor } from '../dependencies.ts'

/** One thing of one shop: every query of a shop's table goes through both. */
export interface ThingKey {
  readonly shopId: string
  readonly id: string
}

export interface VersionedChange<Fields> {
  readonly baseVersion: number
  readonly set: { readonly [Key in keyof Fields]?: Fields[Key] | undefined } & { readonly retiredAt?: Date | null }
}

type VersionedTable = PgTable & { id: PgColumn; shopId: PgColumn; version: PgColumn; updatedAt: PgColumn }

/**
 * Changes a thing in one statement that also checks its version: of two people who save at once, one wins and the
 * other hears of it.
 *
 * @returns false when the version has moved on, or there is no such thing
 */
export async function changeVersioned(
  database: Executor,
  table: VersionedTable,
  key: ThingKey,
  change: { readonly baseVersion: number; readonly set: Readonly<Record<string, unknown>> },
): Promise<boolean> {
  const set: Record<string, unknown | SQL> = { ...change.set, version: sql`${table.version} + 1`, updatedAt: sql`now()` }
  const rows = await database
    .update(table)
    .set(set)
    .where(and(eq(table.shopId, key.shopId), eq(table.id, key.id), eq(table.version, change.baseVersion)))
    .returning({ id: table.id })
  return rows.length > 0
}

/** Times leave the data layer as ISO text, as the contracts say. */
export function instantsToText<Row extends { readonly createdAt: Date; readonly updatedAt: Date; readonly retiredAt: Date | null }>(row: Row) {
  return {
    ...row,
    createdAt: row.createdAt.toISOString(),
    updatedAt: row.updatedAt.toISOString(),
    retiredAt: row.retiredAt === null ? null : row.retiredAt.toISOString(),
  }
}
