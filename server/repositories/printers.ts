import { and, eq, isNotNull, isNull, sql } from 'drizzle-orm'
import { printer } from '#db/schema/index.ts'
import type { NewPrinter, Printer } from '#shared/contracts/printers.ts'
import type { Executor } from '../dependencies.ts'
import { byNumber, byText, byTime, containing, keyset, pageOf, readSort } from './keyset.ts'
import { changeVersioned, instantsToText, type ThingKey, type VersionedChange } from './versioned.ts'

const { shopId: _shop, ...columns } = {
  id: printer.id, shopId: printer.shopId, version: printer.version, createdAt: printer.createdAt, updatedAt: printer.updatedAt, retiredAt: printer.retiredAt,
  name: printer.name, lightEngineWavelengthNanometres: printer.lightEngineWavelengthNanometres, pixelSizeMicrometres: printer.pixelSizeMicrometres,
  plateWidthMillimetres: printer.plateWidthMillimetres, plateDepthMillimetres: printer.plateDepthMillimetres,
  exposureStepSeconds: printer.exposureStepSeconds, exposureSecondsMin: printer.exposureSecondsMin, exposureSecondsMax: printer.exposureSecondsMax,
  irradianceMilliwattsPerSquareCentimetre: printer.irradianceMilliwattsPerSquareCentimetre, notes: printer.notes,
}

export interface ListQuery<Sort extends string> {
  readonly q?: string | undefined
  readonly state: 'active' | 'retired' | 'all'
  readonly sort: Sort | `-${Sort}`
  readonly cursor?: string | undefined
  readonly limit: number
}

const sortKeys = {
  name: byText(printer.name),
  lightEngineWavelengthNanometres: byNumber(printer.lightEngineWavelengthNanometres),
  updatedAt: byTime(printer.updatedAt),
}

export async function listPrinters(database: Executor, shopId: string, query: ListQuery<keyof typeof sortKeys>) {
  const { name, descending } = readSort<keyof typeof sortKeys>(query.sort)
  const keys = keyset(sortKeys[name], printer.id, { ...query, descending })
  const filter = and(
    eq(printer.shopId, shopId),
    query.state === 'all' ? undefined : query.state === 'active' ? isNull(printer.retiredAt) : isNotNull(printer.retiredAt),
    query.q === undefined ? undefined : sql`(${printer.name} ilike ${containing(query.q)} or ${printer.notes} ilike ${containing(query.q)})`,
  )
  const rows = await database.select({ ...columns, sortKey: keys.sortKey }).from(printer).where(and(filter, keys.after)).orderBy(...keys.orderBy).limit(keys.rowsWanted)
  const page = pageOf(rows, query)
  return { items: page.items.map(instantsToText), nextCursor: page.nextCursor, total: await database.$count(printer, filter) }
}

export async function readPrinter(database: Executor, { shopId, id }: ThingKey): Promise<Printer | null> {
  const [row] = await database.select(columns).from(printer).where(and(eq(printer.shopId, shopId), eq(printer.id, id)))
  return row === undefined ? null : instantsToText(row)
}

export async function insertPrinter(database: Executor, { shopId, id }: ThingKey, values: NewPrinter): Promise<void> {
  await database.insert(printer).values({ ...values, id, shopId })
}

export const changePrinter = (database: Executor, key: ThingKey, change: VersionedChange<NewPrinter>) => changeVersioned(database, printer, key, change)
