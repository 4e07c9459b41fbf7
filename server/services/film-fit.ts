import { createHash } from 'node:crypto'
import type { StoredFilmReading } from '#shared/contracts/film.ts'
import { filmFitInputs, layerRuleOf } from '#shared/contracts/film-fit-inputs.ts'
import type { Study } from '#shared/contracts/studies.ts'
import {
  acceptedCurve, curveExposureForLayer, filmLibraryVersion, fitWorkingCurve,
  type AcceptedCurve, type CurveExposureOutcome, type WorkingCurveFit, type WorkingCurveOptions, type WorkingCurveOutcome,
} from '#shared/film/index.ts'
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

/** Other curves than the straight line take seconds beyond this, and everybody else's calls would wait for them. */
const bentCurveReadingsMax = 2000

export interface StudyAnswer {
  /** The curve accepted for the study; the straight line where it cannot be fitted, which `curve.remark` then says. */
  readonly curve: AcceptedCurve
  readonly exposure: CurveExposureOutcome
}

/** The exposure for the study's layers by its curve and its rule: what the study answers with. */
export function studyAnswer(study: Pick<Study, 'film' | 'layerHeightMicrometres'>, inputs: WorkingCurveOptions, straight: WorkingCurveFit): StudyAnswer {
  const { model, useCensored } = study.film
  if ((model !== 'straight-line' || useCensored) && inputs.readings.length > bentCurveReadingsMax) {
    const detail = `The server fits the curve chosen for this study to at most ${bentCurveReadingsMax} readings; the page of the study shows its answer.`
    return { curve: { name: 'straight-line', fit: straight, remark: null }, exposure: { kind: 'refused', detail } }
  }
  const curve = acceptedCurve(inputs, straight, study.film)
  return { curve, exposure: curveExposureForLayer(curve, straight, { layerHeightMicrometres: study.layerHeightMicrometres, rule: layerRuleOf(study.film) }) }
}
