import { filmFitInputs } from '#shared/contracts/film-fit-inputs.ts'
import { compareLayerRules } from '#shared/film/index.ts'
import { toCsv } from '#shared/imports/index.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import type { StudyKey } from '../repositories/film-readings.ts'
import { fitCsv, layerRulesOf } from './film-fit-csv.ts'
import { readFilmFit } from './film-fit.ts'
import { readingHeader, readingLines } from './film-readings-csv.ts'

export interface ExportedFile {
  readonly text: string
  readonly fileName: string
}

/** Study, readings and fit of one moment, whatever is saved meanwhile. */
const readAtOnce = (database: Executor, key: StudyKey) =>
  database.transaction(transaction => readFilmFit(transaction, key), { isolationLevel: 'repeatable read', accessMode: 'read only' })

/**
 * Every reading of a study as CSV: UTF-8, one row a reading, units at the end of the names, instants in ISO 8601.
 */
export async function exportReadings(database: Executor, key: StudyKey): Promise<ExportedFile> {
  const { study, readings } = await readAtOnce(database, key)
  return { text: toCsv([readingHeader(study.exposureKind)]) + readingLines(readings), fileName: `${study.name} film readings.csv` }
}

/** Parameters and answers of the working curve as CSV. */
export async function exportFit(database: Executor, key: StudyKey): Promise<ExportedFile> {
  const fit = await readAtOnce(database, key)
  return { text: fitCsv(fit.study, fit), fileName: `${fit.study.name} film fit.csv` }
}

/**
 * The whole film chapter as JSON. `fit.inputs` is exactly what the fit was made from, so that anybody with the library of
 * `fit.libraryVersion` gets `fit.outcome` again, digit by digit; `fit.inputsHash` says whether two fits rest on the same.
 */
export async function exportFilmChapter({ database, clock }: Pick<Dependencies, 'database' | 'clock'>, key: StudyKey): Promise<ExportedFile> {
  const { study, readings, inputsHash, libraryVersion, outcome } = await readAtOnce(database, key)
  const { film: settings, ...rest } = study
  const chapter = {
    kind: 'fanlight-film',
    formatVersion: 1,
    exportedAt: clock().toISOString(),
    units: { exposure: study.exposureKind, depth: 'micrometres', time: 'ISO 8601' },
    study: rest,
    settings,
    readings,
    fit: { libraryVersion, inputsHash, inputs: filmFitInputs(study, readings), outcome },
    exposuresForLayer: outcome.kind === 'fitted'
      ? compareLayerRules(outcome, { layerHeightMicrometres: study.layerHeightMicrometres, rules: layerRulesOf(settings) })
      : null,
  }
  return { text: `${JSON.stringify(chapter, null, 1)}\n`, fileName: `${study.name} film.json` }
}
