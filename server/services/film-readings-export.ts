import type { StoredFilmReading } from '#shared/contracts/film.ts'
import { toCsv, type CsvValue, type ExposureKind } from '#shared/imports/index.ts'
import type { Executor } from '../dependencies.ts'
import { listReadings, type StudyKey } from '../repositories/film-readings.ts'

/** Readings per query: one page is in memory at a time, as objects. */
const pageSize = 10_000

const columns: readonly (readonly [string, (reading: StoredFilmReading) => CsvValue])[] = [
  ['replicate', reading => reading.replicate],
  ['depth_micrometres', reading => reading.depthMicrometres],
  ['standard_uncertainty_micrometres', reading => reading.standardUncertaintyMicrometres],
  ['state', reading => reading.state],
  ['note', reading => reading.note],
  ['exclusion_reason', reading => reading.exclusionReason],
  ['exposure_text', reading => reading.exposureText],
  ['depth_text', reading => reading.depthText],
  ['entered_by', reading => reading.enteredBy],
  ['entered_at', reading => reading.enteredAt],
  ['updated_at', reading => reading.updatedAt],
  ['version', reading => reading.version],
  ['import_batch_id', reading => reading.importBatchId],
  ['reading_id', reading => reading.id],
]

export const exposureColumn = { seconds: 'exposure_seconds', 'mJ/cm2': 'exposure_mj_per_cm2' } as const satisfies Record<ExposureKind, string>

/** Readings as lines of CSV, without the header. */
export const readingLines = (readings: readonly StoredFilmReading[]): string =>
  toCsv(readings.map(reading => [reading.exposure, ...columns.map(([, value]) => value(reading))]))

/**
 * Every reading of a study as CSV: UTF-8, one row a reading, units at the end of the names, instants in ISO 8601.
 * All pages are of one moment, whatever is saved meanwhile.
 */
export async function readingsCsv(database: Executor, key: StudyKey, exposureKind: ExposureKind): Promise<string> {
  return database.transaction(async transaction => {
    const parts = [toCsv([[exposureColumn[exposureKind], ...columns.map(([name]) => name)]])]
    for (let after: { exposure: number; replicate: number } | null = null; ;) {
      const rows = await listReadings(transaction, key, { after, limit: pageSize })
      parts.push(readingLines(rows))
      const last = rows.at(-1)
      if (rows.length < pageSize || last === undefined) return parts.join('')
      after = { exposure: last.exposure, replicate: last.replicate }
    }
  }, { isolationLevel: 'repeatable read', accessMode: 'read only' })
}
