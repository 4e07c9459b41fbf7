import { createHash } from 'node:crypto'
import type { StoredFilmReading } from '#shared/contracts/film.ts'
import { filmFitInputs } from '#shared/contracts/film-fit-inputs.ts'
import type { Study } from '#shared/contracts/studies.ts'
import { filmLibraryVersion, fitWorkingCurve, type WorkingCurveOptions, type WorkingCurveOutcome } from '#shared/film/index.ts'
import type { Executor } from '../dependencies.ts'
import { notFound } from '../errors.ts'
import { readStudy } from '../repositories/studies.ts'
import { allReadings } from './film-readings.ts'

export interface FilmFit {
  readonly study: Study
  readonly readings: readonly StoredFilmReading[]
  /** SHA-256 of the inputs: the same readings and settings give the same hash, on any machine. */
  readonly inputsHash: string
  readonly libraryVersion: string
  readonly outcome: WorkingCurveOutcome
}

/** Hash of what a fit rests on; ids and who typed it do not matter to the numbers. */
export function hashFilmInputs(inputs: WorkingCurveOptions): string {
  const rows = inputs.readings.map(({ exposure, depthMicrometres, standardUncertaintyMicrometres, state, filmId }) =>
    [exposure, state === 'measured' || state === 'excluded' ? depthMicrometres : null, standardUncertaintyMicrometres ?? null, state, filmId ?? null])
  const canonical = JSON.stringify({ exposureKind: inputs.exposureKind, weighting: inputs.weighting, confidenceLevel: inputs.confidenceLevel, rows })
  return createHash('sha256').update(canonical).digest('hex')
}

/** The working curve of a study as the server fits it, from what is stored now. */
export async function readFilmFit(database: Executor, key: { shopId: string; studyId: string }): Promise<FilmFit> {
  const study = await readStudy(database, { shopId: key.shopId, id: key.studyId })
  if (study === null) throw notFound('study')
  const readings = await allReadings(database, key)
  const inputs = filmFitInputs(study, readings)
  return { study, readings, inputsHash: hashFilmInputs(inputs), libraryVersion: filmLibraryVersion, outcome: fitWorkingCurve(inputs) }
}
