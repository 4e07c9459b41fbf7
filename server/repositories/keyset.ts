import { sql, type SQL } from 'drizzle-orm'
import { z } from 'zod'
import { AppError } from '../errors.ts'

/** One way to sort a list: an expression whose values, with the id, put every row in one place. */
export interface SortKey {
  /** Text of the value, as the cursor keeps it. */
  readonly expression: SQL
  readonly type: 'text' | 'float8'
}

/** Compared byte by byte, so that the order is the same on every machine; case does not matter to people. */
export const byText = (column: SQL | { getSQL(): SQL }): SortKey => ({ expression: sql`lower(${column}) collate "C"`, type: 'text' })
export const byNumber = (column: { getSQL(): SQL }): SortKey => ({ expression: sql`${column}`, type: 'float8' })
/** Microseconds keep their place; without a value a row sorts as the oldest. */
export const byTime = (column: { getSQL(): SQL }): SortKey => ({
  expression: sql`coalesce(to_char(${column}::timestamptz at time zone 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.US'), '') collate "C"`,
  type: 'text',
})

/** Sort, value and id of the last row: a cursor of one order means nothing in another. PostgreSQL holds no zero byte. */
const cursorSchema = z.tuple([z.string().max(60), z.string().max(400).refine(text => !text.includes('\0')), z.uuid()])

const foreignCursor = () => new AppError('bad-request', { detail: 'This cursor was not made by this list. Start from the first page.' })

function decode(cursor: string | undefined, sort: string): readonly [string, string] | null {
  if (cursor === undefined) return null
  try {
    const [madeFor, value, id] = cursorSchema.parse(JSON.parse(Buffer.from(cursor, 'base64url').toString('utf8')))
    if (madeFor === sort) return [value, id]
  } catch {
    // Answered below, as a cursor of another list is.
  }
  throw foreignCursor()
}

export interface Keyset {
  readonly after: SQL | undefined
  readonly orderBy: SQL[]
  /** Selected as `sortKey`, to make the next cursor. */
  readonly sortKey: SQL<string>
  readonly rowsWanted: number
}

/** What a query needs to answer one page: rows after the cursor, in order, one more than fits. */
export function keyset(key: SortKey, id: SQL | { getSQL(): SQL }, page: { sort: string; descending: boolean; cursor?: string | undefined; limit: number }): Keyset {
  const cursor = decode(page.cursor, page.sort)
  const value = cursor === null ? null : key.type === 'float8' ? numberOf(cursor[0]) : sql`${cursor[0]}::text`
  const compare = page.descending ? sql.raw('<') : sql.raw('>')
  const direction = page.descending ? sql.raw('desc') : sql.raw('asc')
  return {
    after: cursor === null ? undefined : sql`(${key.expression}, ${id}) ${compare} (${value}, ${cursor[1]}::uuid)`,
    orderBy: [sql`${key.expression} ${direction}`, sql`${id} ${direction}`],
    sortKey: sql<string>`(${key.expression})::text`,
    rowsWanted: page.limit + 1,
  }
}

function numberOf(text: string): SQL {
  const value = Number(text)
  if (!Number.isFinite(value)) throw foreignCursor()
  return sql`${value}::float8`
}

/** Cuts the one row too many off and makes the cursor of the next page. */
export function pageOf<Row extends { readonly id: string; readonly sortKey: string }>(rows: readonly Row[], query: { readonly sort: string; readonly limit: number }): { items: Omit<Row, 'sortKey'>[]; nextCursor: string | null } {
  const kept = rows.slice(0, query.limit)
  const last = kept.at(-1)
  return {
    items: kept.map(({ sortKey: _key, ...row }) => row),
    nextCursor: rows.length > query.limit && last !== undefined ? Buffer.from(JSON.stringify([query.sort, last.sortKey, last.id])).toString('base64url') : null,
  }
}

/** A search text as a LIKE pattern: what people type is never a wildcard. */
export function containing(text: string): string {
  return `%${text.trim().replace(/[\\%_]/g, character => `\\${character}`)}%`
}

/** "-name" is name, falling. */
export function readSort<Name extends string>(sort: Name | `-${Name}`): { name: Name; descending: boolean } {
  const descending = sort.startsWith('-')
  return { name: (descending ? sort.slice(1) : sort) as Name, descending }
}
