import { and, eq, isNotNull, isNull, sql } from 'drizzle-orm'
import { pairing, printer, resin, study } from '#db/schema/index.ts'
import type { Pairing } from '#shared/contracts/pairings.ts'
import type { Executor } from '../dependencies.ts'
import { byText, byTime, containing, keyset, pageOf, readSort } from './keyset.ts'
import type { ListQuery } from './printers.ts'
import { changeVersioned, instantsToText, type ThingKey, type VersionedChange } from './versioned.ts'

const columns = {
  id: pairing.id, version: pairing.version, createdAt: pairing.createdAt, updatedAt: pairing.updatedAt, retiredAt: pairing.retiredAt,
  printerId: pairing.printerId, printerName: printer.name, resinId: pairing.resinId, resinName: resin.name, notes: pairing.notes,
  studyCount: sql<number>`(select count(*)::int from ${study} where ${study.shopId} = ${pairing.shopId} and ${study.pairingId} = ${pairing.id} and ${study.retiredAt} is null)`,
}
const ofPrinter = and(eq(printer.id, pairing.printerId), eq(printer.shopId, pairing.shopId))
const ofResin = and(eq(resin.id, pairing.resinId), eq(resin.shopId, pairing.shopId))
const sortKeys = { printerName: byText(printer.name), resinName: byText(resin.name), updatedAt: byTime(pairing.updatedAt) }

const joined = (database: Executor) => database.select({ n: sql<number>`count(*)::int` }).from(pairing).innerJoin(printer, ofPrinter).innerJoin(resin, ofResin)

export async function listPairings(
  database: Executor,
  shopId: string,
  query: ListQuery<keyof typeof sortKeys> & { readonly printerId?: string | undefined; readonly resinId?: string | undefined },
) {
  const { name, descending } = readSort<keyof typeof sortKeys>(query.sort)
  const keys = keyset(sortKeys[name], pairing.id, { ...query, descending })
  const filter = and(
    eq(pairing.shopId, shopId),
    query.printerId === undefined ? undefined : eq(pairing.printerId, query.printerId),
    query.resinId === undefined ? undefined : eq(pairing.resinId, query.resinId),
    query.state === 'all' ? undefined : query.state === 'active' ? isNull(pairing.retiredAt) : isNotNull(pairing.retiredAt),
    query.q === undefined ? undefined : sql`(${printer.name} ilike ${containing(query.q)} or ${resin.name} ilike ${containing(query.q)})`,
  )
  const rows = await database
    .select({ ...columns, sortKey: keys.sortKey }).from(pairing).innerJoin(printer, ofPrinter).innerJoin(resin, ofResin)
    .where(and(filter, keys.after)).orderBy(...keys.orderBy).limit(keys.rowsWanted)
  const page = pageOf(rows, query)
  const [counted] = await joined(database).where(filter)
  return { items: page.items.map(instantsToText), nextCursor: page.nextCursor, total: counted?.n ?? 0 }
}

export async function readPairing(database: Executor, { shopId, id }: ThingKey): Promise<Pairing | null> {
  const [row] = await database.select(columns).from(pairing).innerJoin(printer, ofPrinter).innerJoin(resin, ofResin).where(and(eq(pairing.shopId, shopId), eq(pairing.id, id)))
  return row === undefined ? null : instantsToText(row)
}

export async function findPairing(database: Executor, shopId: string, things: { printerId: string; resinId: string }): Promise<Pairing | null> {
  const [row] = await database
    .select(columns).from(pairing).innerJoin(printer, ofPrinter).innerJoin(resin, ofResin)
    .where(and(eq(pairing.shopId, shopId), eq(pairing.printerId, things.printerId), eq(pairing.resinId, things.resinId)))
  return row === undefined ? null : instantsToText(row)
}

/** Fails with the constraint `pairing_unique` when the two are paired already. */
export async function insertPairing(database: Executor, { shopId, id }: ThingKey, values: { printerId: string; resinId: string; notes: string }): Promise<void> {
  await database.insert(pairing).values({ ...values, id, shopId })
}

export const changePairing = (database: Executor, key: ThingKey, change: VersionedChange<{ notes: string }>) => changeVersioned(database, pairing, key, change)
