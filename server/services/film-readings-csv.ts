import type { StoredFilmReading } from '#shared/contracts/film.ts'
import { toCsv, type CsvValue, type ExposureKind } from '#shared/imports/index.ts'

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

const exposureColumn = { seconds: 'exposure_seconds', 'mJ/cm2': 'exposure_mj_per_cm2' } as const satisfies Record<ExposureKind, string>

/** Names of the columns, units at their end. */
export const readingHeader = (exposureKind: ExposureKind): readonly string[] => [exposureColumn[exposureKind], ...columns.map(([name]) => name)]

/** Readings as lines of CSV, without the header. */
export const readingLines = (readings: readonly StoredFilmReading[]): string =>
  toCsv(readings.map(reading => [reading.exposure, ...columns.map(([, value]) => value(reading))]))
