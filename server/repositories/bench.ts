import { and, asc, eq, isNull, sql } from 'drizzle-orm'
import { filmReading, lot, pairing, printer, resin, study } from '#db/schema/index.ts'
import { filmSettingsSchema } from '#shared/contracts/studies.ts'
import type { Executor } from '../dependencies.ts'

/** A study with more readings than this is summed up from every k-th: the bench is a glance, the study is exact. */
export const benchReadingsMax = 2000

/** Everything the bench shows, in five statements however many printers there are. */
export async function readBench(database: Executor, shopId: string) {
  const printers = await database
    .select({
      id: printer.id, name: printer.name, exposureStepSeconds: printer.exposureStepSeconds, exposureSecondsMin: printer.exposureSecondsMin,
      exposureSecondsMax: printer.exposureSecondsMax, lightEngineWavelengthNanometres: printer.lightEngineWavelengthNanometres,
    })
    .from(printer).where(and(eq(printer.shopId, shopId), isNull(printer.retiredAt))).orderBy(asc(printer.name), asc(printer.id))
  const resins = await database
    .select({ id: resin.id, name: resin.name, description: resin.description })
    .from(resin).where(and(eq(resin.shopId, shopId), isNull(resin.retiredAt))).orderBy(asc(resin.name), asc(resin.id))
  const pairings = await database
    .select({ id: pairing.id, printerId: pairing.printerId, resinId: pairing.resinId })
    .from(pairing).where(and(eq(pairing.shopId, shopId), isNull(pairing.retiredAt)))
  const studies = await database
    .select({
      id: study.id, pairingId: study.pairingId, name: study.name, state: study.state, layerHeightMicrometres: study.layerHeightMicrometres,
      exposureKind: study.exposureKind, film: study.film, updatedAt: study.updatedAt, lotId: study.lotId, lotCode: lot.code, lotExpiresOn: lot.expiresOn,
      readingCount: sql<number>`(select count(*)::int from ${filmReading} where ${filmReading.studyId} = ${study.id} and ${filmReading.withdrawnAt} is null)`,
    })
    .from(study).leftJoin(lot, and(eq(lot.id, study.lotId), eq(lot.shopId, study.shopId)))
    .where(and(eq(study.shopId, shopId), isNull(study.retiredAt)))
    .orderBy(asc(study.updatedAt), asc(study.id))
  const readings = await database.execute<{ studyId: string; exposure: number; depthMicrometres: number | null; standardUncertaintyMicrometres: number | null; state: 'measured' | 'no-film' | 'lost-in-wash' | 'excluded' }>(sql`
    select study_id as "studyId", exposure, depth_micrometres as "depthMicrometres", standard_uncertainty_micrometres as "standardUncertaintyMicrometres", state
    from (
      select r.*, row_number() over (partition by r.study_id order by r.exposure, r.replicate) as place, count(*) over (partition by r.study_id) as readings
      from ${filmReading} r join ${study} s on s.id = r.study_id and s.retired_at is null
      where r.shop_id = ${shopId} and r.withdrawn_at is null
    ) numbered
    where readings <= ${benchReadingsMax} or place % ceil(readings::float8 / ${benchReadingsMax})::int = 0
    order by study_id, exposure, replicate`)
  return {
    printers, resins, pairings, readings: readings.rows,
    studies: studies.map(row => ({ ...row, film: filmSettingsSchema.parse(row.film), updatedAt: row.updatedAt.toISOString() })),
  }
}
