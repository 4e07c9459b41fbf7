import { and, asc, eq, isNull, sql } from 'drizzle-orm'
import { fit, lot, pairing, printer, resin, study } from '#db/schema/index.ts'
import { filmSettingsSchema } from '#shared/contracts/studies.ts'
import type { Executor } from '../dependencies.ts'

/** A study with more readings than this is summed up from every k-th: the bench is a glance, the study is exact. */
const readingsPerStudyMax = 2000

/** The kind under which the bench keeps its sums in the table of fits. */
const benchKind = 'bench'

/** Printers, resins, pairings and studies of a shop with the sums that are kept, in four statements however many there are. */
export async function readBench(database: Executor, shopId: string) {
  const printers = await database
    .select({
      id: printer.id, name: printer.name, exposureStepSeconds: printer.exposureStepSeconds, exposureSecondsMin: printer.exposureSecondsMin,
      exposureSecondsMax: printer.exposureSecondsMax, lightEngineWavelengthNanometres: printer.lightEngineWavelengthNanometres,
      irradianceMilliwattsPerSquareCentimetre: printer.irradianceMilliwattsPerSquareCentimetre, retired: sql<boolean>`${printer.retiredAt} is not null`,
    })
    .from(printer).where(eq(printer.shopId, shopId)).orderBy(sql`lower(${printer.name}) collate "C"`, asc(printer.id))
  const resins = await database
    .select({ id: resin.id, name: resin.name, description: resin.description, retired: sql<boolean>`${resin.retiredAt} is not null` })
    .from(resin).where(eq(resin.shopId, shopId)).orderBy(sql`lower(${resin.name}) collate "C"`, asc(resin.id))
  const pairings = await database
    .select({ id: pairing.id, printerId: pairing.printerId, resinId: pairing.resinId, retired: sql<boolean>`${pairing.retiredAt} is not null` })
    .from(pairing).where(eq(pairing.shopId, shopId)).orderBy(asc(pairing.id))
  const studies = await database
    .select({
      id: study.id, pairingId: study.pairingId, name: study.name, state: study.state, layerHeightMicrometres: study.layerHeightMicrometres,
      exposureKind: study.exposureKind, film: study.film, updatedAt: study.updatedAt, readingsRevision: study.readingsRevision,
      lotId: study.lotId, lotCode: lot.code, lotExpiresOn: lot.expiresOn,
      keptHash: fit.inputsHash, keptLibraryVersion: fit.libraryVersion, kept: fit.outcome,
    })
    .from(study)
    .leftJoin(lot, and(eq(lot.id, study.lotId), eq(lot.shopId, study.shopId)))
    .leftJoin(fit, and(eq(fit.studyId, study.id), eq(fit.shopId, study.shopId), eq(fit.kind, benchKind), eq(fit.readingsRevision, study.readingsRevision)))
    .where(and(eq(study.shopId, shopId), isNull(study.retiredAt)))
    .orderBy(asc(study.updatedAt), asc(study.id))
  return { printers, resins, pairings, studies: oneForEach(studies).map(row => ({ ...row, film: filmSettingsSchema.parse(row.film), updatedAt: row.updatedAt.toISOString() })) }
}
export type BenchFacts = Awaited<ReturnType<typeof readBench>>

/** Two benches that were read at once may have kept a sum each. */
function oneForEach<Row extends { readonly id: string }>(rows: readonly Row[]): Row[] {
  return [...new Map(rows.map(row => [row.id, row])).values()]
}

export interface BenchReading {
  readonly studyId: string
  readonly exposure: number
  readonly depthMicrometres: number | null
  readonly standardUncertaintyMicrometres: number | null
  readonly state: 'measured' | 'no-film' | 'lost-in-wash' | 'excluded'
  /** How many readings the study has, shown or not. */
  readonly readingCount: number
}

/** The readings of some studies, in the order in which a study is read. */
export async function readBenchReadings(database: Executor, shopId: string, studyIds: readonly string[]): Promise<readonly BenchReading[]> {
  const { rows } = await database.execute<BenchReading & Record<string, unknown>>(sql`
    select study_id as "studyId", exposure, depth_micrometres as "depthMicrometres", standard_uncertainty_micrometres as "standardUncertaintyMicrometres", state,
      readings::int as "readingCount"
    from (
      select r.*, row_number() over (partition by r.study_id order by r.exposure, r.replicate) as place, count(*) over (partition by r.study_id) as readings
      from film_reading r
      where r.study_id = any(${sql.param(studyIds)}::uuid[]) and r.shop_id = ${shopId} and r.withdrawn_at is null
    ) numbered
    where readings <= ${readingsPerStudyMax} or place % ceil(readings::float8 / ${readingsPerStudyMax})::int = 0
    order by study_id, exposure, replicate`)
  return rows
}

export interface BenchSumToKeep {
  readonly studyId: string
  readonly inputsHash: string
  readonly libraryVersion: string
  readonly readingsRevision: number
  readonly outcome: unknown
}

/** Keeps sums in place of the studies' former ones. */
export async function keepBenchSums(database: Executor, shopId: string, sums: readonly BenchSumToKeep[]): Promise<void> {
  // One order for everybody, so that two benches can never wait for each other in a circle.
  const rows = [...sums].sort((a, b) => (a.studyId < b.studyId ? -1 : 1)).map(sum => ({ ...sum, shopId, kind: benchKind }))
  await database.transaction(async transaction => {
    for (let from = 0; from < rows.length; from += 2000) {
      const some = rows.slice(from, from + 2000)
      await transaction.execute(sql`
        delete from fit where (study_id, kind, inputs_hash) in (
          select study_id, kind, inputs_hash from fit
          where study_id = any(${sql.param(some.map(row => row.studyId))}::uuid[]) and shop_id = ${shopId} and kind = ${benchKind} and not settled
          order by study_id for update skip locked
        )`)
      await transaction.insert(fit).values(some).onConflictDoUpdate({
        target: [fit.studyId, fit.kind, fit.inputsHash],
        set: { libraryVersion: sql`excluded.library_version`, readingsRevision: sql`excluded.readings_revision`, outcome: sql`excluded.outcome`, computedAt: sql`now()` },
      })
    }
  })
}
