import { and, eq, isNotNull, isNull, sql } from 'drizzle-orm'
import { filmReading, lot, pairing, printer, resin, study } from '#db/schema/index.ts'
import { detailTargetSchema, filmSettingsSchema, type Study, type StudyChange } from '#shared/contracts/studies.ts'
import type { Executor } from '../dependencies.ts'
import { byNumber, byText, byTime, containing, keyset, pageOf, readSort } from './keyset.ts'
import { preparedOnce } from './prepared.ts'
import type { ListQuery } from './printers.ts'
import { changeVersioned, instantsToText, type ThingKey, type VersionedChange } from './versioned.ts'

const columns = {
  id: study.id, version: study.version, createdAt: study.createdAt, updatedAt: study.updatedAt, retiredAt: study.retiredAt,
  name: study.name, lotId: study.lotId, layerHeightMicrometres: study.layerHeightMicrometres, resinTemperatureCelsius: study.resinTemperatureCelsius,
  notes: study.notes, pairingId: study.pairingId, printerId: pairing.printerId, printerName: printer.name, resinId: pairing.resinId, resinName: resin.name,
  lotCode: lot.code, exposureKind: study.exposureKind, state: study.state, detailTarget: study.detailTarget, film: study.film,
  readingsRevision: study.readingsRevision,
  exposureStepSeconds: printer.exposureStepSeconds, exposureSecondsMin: printer.exposureSecondsMin, exposureSecondsMax: printer.exposureSecondsMax,
  irradianceMilliwattsPerSquareCentimetre: printer.irradianceMilliwattsPerSquareCentimetre, lightEngineWavelengthNanometres: printer.lightEngineWavelengthNanometres,
  filmReadingCount: sql<number>`(select count(*)::int from ${filmReading} where ${filmReading.studyId} = ${study.id} and ${filmReading.withdrawnAt} is null)`,
}
const ofPairing = and(eq(pairing.id, study.pairingId), eq(pairing.shopId, study.shopId))
const ofPrinter = and(eq(printer.id, pairing.printerId), eq(printer.shopId, study.shopId))
const ofResin = and(eq(resin.id, pairing.resinId), eq(resin.shopId, study.shopId))
const ofLot = and(eq(lot.id, study.lotId), eq(lot.shopId, study.shopId))

const sortKeys = {
  name: byText(study.name),
  layerHeightMicrometres: byNumber(study.layerHeightMicrometres),
  printerName: byText(printer.name),
  resinName: byText(resin.name),
  updatedAt: byTime(study.updatedAt),
}

const rowsOf = (database: Executor) =>
  database.select(columns).from(study).innerJoin(pairing, ofPairing).innerJoin(printer, ofPrinter).innerJoin(resin, ofResin).leftJoin(lot, ofLot)

type Row = Awaited<ReturnType<typeof rowsOf>>[number]

/** Parses what the database keeps as JSON: a shape from an older release must not reach the page unseen. */
function toStudy(row: Row): Study {
  const { exposureStepSeconds, exposureSecondsMin, exposureSecondsMax, irradianceMilliwattsPerSquareCentimetre, lightEngineWavelengthNanometres, ...rest } = row
  return {
    ...instantsToText(rest),
    detailTarget: rest.detailTarget === null ? null : detailTargetSchema.parse(rest.detailTarget),
    film: filmSettingsSchema.parse(rest.film),
    printer: { exposureStepSeconds, exposureSecondsMin, exposureSecondsMax, irradianceMilliwattsPerSquareCentimetre, lightEngineWavelengthNanometres },
  }
}

export type StudyQuery = ListQuery<keyof typeof sortKeys> & {
  readonly work?: Study['state'] | undefined
  readonly printerId?: string | undefined
  readonly resinId?: string | undefined
  readonly pairingId?: string | undefined
  readonly lotId?: string | undefined
}

export async function listStudies(database: Executor, shopId: string, query: StudyQuery) {
  const { name, descending } = readSort<keyof typeof sortKeys>(query.sort)
  const keys = keyset(sortKeys[name], study.id, { ...query, descending })
  const given = <T>(value: T | undefined, condition: (value: T) => ReturnType<typeof eq>) => (value === undefined ? undefined : condition(value))
  const filter = and(
    eq(study.shopId, shopId),
    given(query.work, value => eq(study.state, value)),
    given(query.printerId, value => eq(pairing.printerId, value)),
    given(query.resinId, value => eq(pairing.resinId, value)),
    given(query.pairingId, value => eq(study.pairingId, value)),
    given(query.lotId, value => eq(study.lotId, value)),
    query.state === 'all' ? undefined : query.state === 'active' ? isNull(study.retiredAt) : isNotNull(study.retiredAt),
    given(query.q, value => sql`(${study.name} ilike ${containing(value)} or ${printer.name} ilike ${containing(value)} or ${resin.name} ilike ${containing(value)} or ${lot.code} ilike ${containing(value)})`),
  )
  const rows = await database
    .select({ ...columns, sortKey: keys.sortKey }).from(study).innerJoin(pairing, ofPairing).innerJoin(printer, ofPrinter).innerJoin(resin, ofResin).leftJoin(lot, ofLot)
    .where(and(filter, keys.after)).orderBy(...keys.orderBy).limit(keys.rowsWanted)
  const page = pageOf(rows, query)
  const [counted] = await database
    .select({ n: sql<number>`count(*)::int` }).from(study).innerJoin(pairing, ofPairing).innerJoin(printer, ofPrinter).innerJoin(resin, ofResin).leftJoin(lot, ofLot).where(filter)
  return { items: page.items.map(toStudy), nextCursor: page.nextCursor, total: counted?.n ?? 0 }
}

const studyStatement = preparedOnce(database =>
  rowsOf(database).where(and(eq(study.shopId, sql.placeholder('shopId')), eq(study.id, sql.placeholder('id')))).prepare('read_study'))

export async function readStudy(database: Executor, key: ThingKey): Promise<Study | null> {
  const [row] = await studyStatement(database).execute({ shopId: key.shopId, id: key.id })
  return row === undefined ? null : toStudy(row)
}

export async function insertStudy(
  database: Executor,
  { shopId, id }: ThingKey,
  values: Pick<Study, 'name' | 'lotId' | 'layerHeightMicrometres' | 'resinTemperatureCelsius' | 'notes' | 'pairingId' | 'exposureKind' | 'film'>,
): Promise<void> {
  await database.insert(study).values({ ...values, id, shopId })
}

export const changeStudy = (database: Executor, key: ThingKey, change: VersionedChange<StudyChange>) => changeVersioned(database, study, key, change)
