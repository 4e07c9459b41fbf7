import { filmFitInputs } from '#shared/contracts/film-fit-inputs.ts'
import { compareLayerRules } from '#shared/film/index.ts'
import { toCsv } from '#shared/imports/index.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import { notFound } from '../errors.ts'
import type { StudyKey } from '../repositories/film-readings.ts'
import { readStudy } from '../repositories/studies.ts'
import { fitCsv, layerRulesOf } from './film-fit-csv.ts'
import { readFilmFit, studyAnswer } from './film-fit.ts'
import { allReadings } from './film-readings.ts'
import { readingHeader, readingLines } from './film-readings-csv.ts'

export interface ExportedFile {
  readonly text: string
  readonly fileName: string
}

/** What is read inside is of one moment, whatever is saved meanwhile. */
const atOnce = <Result>(database: Executor, read: (transaction: Executor) => Promise<Result>) =>
  database.transaction(read, { isolationLevel: 'repeatable read', accessMode: 'read only' })

/** Up to here a chapter is laid out for a person to read; beyond, the blanks would be most of the file. */
const readingsLaidOutMax = 2000

/**
 * Every reading of a study as CSV: UTF-8, one row a reading, units at the end of the names, instants in ISO 8601.
 */
export async function exportReadings(database: Executor, key: StudyKey): Promise<ExportedFile> {
  const { study, readings } = await atOnce(database, async transaction => {
    const study = await readStudy(transaction, { shopId: key.shopId, id: key.studyId })
    if (study === null) throw notFound('study')
    return { study, readings: await allReadings(transaction, key) }
  })
  return { text: toCsv([readingHeader(study.exposureKind)]) + readingLines(readings), fileName: `${study.name} film readings.csv` }
}

/** Parameters and answers of the working curve as CSV. */
export async function exportFit(database: Executor, key: StudyKey): Promise<ExportedFile> {
  const fit = await atOnce(database, transaction => readFilmFit(transaction, key))
  return { text: fitCsv(fit), fileName: `${fit.study.name} film fit.csv` }
}

/**
 * The whole film chapter as JSON. `fit.inputs` is exactly what the fit was made from, so that anybody with the library of
 * `fit.libraryVersion` gets `fit.outcome` again, digit by digit; `fit.inputsHash` says whether two fits rest on the same.
 */
export async function exportFilmChapter({ database, clock }: Pick<Dependencies, 'database' | 'clock'>, key: StudyKey): Promise<ExportedFile> {
  const { study, readings, inputsHash, libraryVersion, outcome } = await atOnce(database, transaction => readFilmFit(transaction, key))
  const { film: settings, ...rest } = study
  const inputs = filmFitInputs(study, readings)
  const answer = outcome.kind === 'fitted' ? studyAnswer(study, inputs, outcome) : null
  const chapter = {
    kind: 'fanlight-film',
    formatVersion: 1,
    exportedAt: clock().toISOString(),
    units: { exposure: study.exposureKind, depth: 'micrometres', time: 'ISO 8601' },
    study: rest,
    settings,
    readings,
    fit: { libraryVersion, inputsHash, inputs, outcome },
    // The study's own number, by the curve that was accepted for it.
    answer: answer === null ? null : { curve: answer.curve.name, remark: answer.curve.remark, exposureForLayer: answer.exposure },
    exposuresForLayer: outcome.kind === 'fitted'
      ? compareLayerRules(outcome, { layerHeightMicrometres: study.layerHeightMicrometres, rules: layerRulesOf(settings) })
      : null,
  }
  return { text: `${JSON.stringify(chapter, null, readings.length > readingsLaidOutMax ? 0 : 1)}\n`, fileName: `${study.name} film.json` }
}
