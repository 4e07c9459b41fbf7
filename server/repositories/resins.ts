import { and, eq, isNotNull, isNull, sql } from 'drizzle-orm'
import { lot, resin } from '#db/schema/index.ts'
import type { Lot, NewLot, NewResin, Resin } from '#shared/contracts/resins.ts'
import type { Executor } from '../dependencies.ts'
import { byText, byTime, containing, keyset, pageOf, readSort } from './keyset.ts'
import type { ListQuery } from './printers.ts'
import { changeVersioned, instantsToText, type ThingKey, type VersionedChange } from './versioned.ts'

const resinColumns = {
  id: resin.id, version: resin.version, createdAt: resin.createdAt, updatedAt: resin.updatedAt, retiredAt: resin.retiredAt,
  name: resin.name, description: resin.description, notes: resin.notes,
  lotCount: sql<number>`(select count(*)::int from ${lot} where ${lot.shopId} = ${resin.shopId} and ${lot.resinId} = ${resin.id})`,
}
const resinSortKeys = { name: byText(resin.name), updatedAt: byTime(resin.updatedAt) }

export async function listResins(database: Executor, shopId: string, query: ListQuery<keyof typeof resinSortKeys>) {
  const { name, descending } = readSort<keyof typeof resinSortKeys>(query.sort)
  const keys = keyset(resinSortKeys[name], resin.id, { ...query, descending })
  const filter = and(
    eq(resin.shopId, shopId),
    query.state === 'all' ? undefined : query.state === 'active' ? isNull(resin.retiredAt) : isNotNull(resin.retiredAt),
    query.q === undefined ? undefined : sql`(${resin.name} ilike ${containing(query.q)} or ${resin.description} ilike ${containing(query.q)})`,
  )
  const rows = await database.select({ ...resinColumns, sortKey: keys.sortKey }).from(resin).where(and(filter, keys.after)).orderBy(...keys.orderBy).limit(keys.rowsWanted)
  const page = pageOf(rows, query)
  return { items: page.items.map(instantsToText), nextCursor: page.nextCursor, total: await database.$count(resin, filter) }
}

export async function readResin(database: Executor, { shopId, id }: ThingKey): Promise<Resin | null> {
  const [row] = await database.select(resinColumns).from(resin).where(and(eq(resin.shopId, shopId), eq(resin.id, id)))
  return row === undefined ? null : instantsToText(row)
}

export async function insertResin(database: Executor, { shopId, id }: ThingKey, values: NewResin): Promise<void> {
  await database.insert(resin).values({ ...values, id, shopId })
}

export const changeResin = (database: Executor, key: ThingKey, change: VersionedChange<NewResin>) => changeVersioned(database, resin, key, change)

const lotColumns = {
  id: lot.id, version: lot.version, createdAt: lot.createdAt, updatedAt: lot.updatedAt, retiredAt: lot.retiredAt,
  code: lot.code, receivedOn: lot.receivedOn, openedOn: lot.openedOn, expiresOn: lot.expiresOn, notes: lot.notes,
  resinId: lot.resinId, resinName: resin.name,
}
const lotSortKeys = { code: byText(lot.code), receivedOn: byTime(lot.receivedOn), expiresOn: byTime(lot.expiresOn), updatedAt: byTime(lot.updatedAt) }
const ofSameShop = and(eq(resin.id, lot.resinId), eq(resin.shopId, lot.shopId))

export async function listLots(database: Executor, shopId: string, query: ListQuery<keyof typeof lotSortKeys> & { readonly resinId?: string | undefined }) {
  const { name, descending } = readSort<keyof typeof lotSortKeys>(query.sort)
  const keys = keyset(lotSortKeys[name], lot.id, { ...query, descending })
  const filter = and(
    eq(lot.shopId, shopId),
    query.resinId === undefined ? undefined : eq(lot.resinId, query.resinId),
    query.state === 'all' ? undefined : query.state === 'active' ? isNull(lot.retiredAt) : isNotNull(lot.retiredAt),
    query.q === undefined ? undefined : sql`(${lot.code} ilike ${containing(query.q)} or exists (select 1 from ${resin} where ${ofSameShop} and ${resin.name} ilike ${containing(query.q)}))`,
  )
  const rows = await database.select({ ...lotColumns, sortKey: keys.sortKey }).from(lot).innerJoin(resin, ofSameShop).where(and(filter, keys.after)).orderBy(...keys.orderBy).limit(keys.rowsWanted)
  const page = pageOf(rows, query)
  return { items: page.items.map(instantsToText), nextCursor: page.nextCursor, total: await database.$count(lot, filter) }
}

export async function readLot(database: Executor, { shopId, id }: ThingKey): Promise<Lot | null> {
  const [row] = await database.select(lotColumns).from(lot).innerJoin(resin, ofSameShop).where(and(eq(lot.shopId, shopId), eq(lot.id, id)))
  return row === undefined ? null : instantsToText(row)
}

export async function insertLot(database: Executor, { shopId, id }: ThingKey, values: NewLot): Promise<void> {
  await database.insert(lot).values({ ...values, id, shopId })
}

export const changeLot = (database: Executor, key: ThingKey, change: VersionedChange<NewLot>) => changeVersioned(database, lot, key, change)
