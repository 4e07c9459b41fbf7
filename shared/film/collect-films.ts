import { StatsError } from '../stats/types.ts'
import type { FilmReading } from './types.ts'

/** One film: the replicate that a fit counts. */
export interface Film {
  readonly exposure: number
  readonly logExposure: number
  readonly depthMicrometres: number
  readonly standardUncertaintyMicrometres: number | null
  readonly readingIds: readonly string[]
  readonly readingIndexes: readonly number[]
}

/**
 * Checks readings once and averages repeated readings of one film.
 *
 * A film measured at or below zero is no film by the gauge: it is listed and does not enter, like "no film".
 * Readings of one film at different exposures are taken as different films: a film has one exposure.
 *
 * @throws {StatsError} `exposure-out-of-range`, `depth-out-of-range`, `uncertainty-out-of-range`
 */
export function collectFilms(readings: readonly FilmReading[]): {
  readonly films: readonly Film[]
  readonly excludedIndexes: readonly number[]
  readonly censoredIndexes: readonly number[]
  readonly notAboveZeroIndexes: readonly number[]
} {
  const films: { exposure: number; depths: number; variances: number; stated: boolean; ids: string[]; indexes: number[] }[] = []
  const byFilm = new Map<string, (typeof films)[number]>()
  const excludedIndexes: number[] = []
  const censoredIndexes: number[] = []
  for (const [index, reading] of readings.entries()) {
    if (!(reading.exposure > 0) || !Number.isFinite(reading.exposure)) {
      throw new StatsError('exposure-out-of-range', `reading ${index + 1}: exposure must be above zero, got ${reading.exposure}`)
    }
    if (reading.state === 'excluded') {
      excludedIndexes.push(index)
      continue
    }
    if (reading.state !== 'measured') {
      censoredIndexes.push(index)
      continue
    }
    if (!Number.isFinite(reading.depthMicrometres)) {
      throw new StatsError('depth-out-of-range', `reading ${index + 1}: depth must be a finite number, got ${reading.depthMicrometres}`)
    }
    const uncertainty = reading.standardUncertaintyMicrometres
    if (uncertainty !== undefined && !(uncertainty > 0 && Number.isFinite(uncertainty))) {
      throw new StatsError('uncertainty-out-of-range', `reading ${index + 1}: uncertainty must be above zero, got ${uncertainty}`)
    }
    const key = reading.filmId === undefined ? null : `${reading.filmId}\n${reading.exposure}`
    let film = key === null ? undefined : byFilm.get(key)
    if (film === undefined) {
      film = { exposure: reading.exposure, depths: 0, variances: 0, stated: true, ids: [], indexes: [] }
      films.push(film)
      if (key !== null) byFilm.set(key, film)
    }
    film.depths += reading.depthMicrometres
    if (uncertainty === undefined) film.stated = false
    else film.variances += uncertainty * uncertainty
    if (reading.id !== undefined) film.ids.push(reading.id)
    film.indexes.push(index)
  }
  // Judged after averaging: a film of -1 and 4 µm is a thin film, one of -1 and 0 µm is none.
  const there = films.filter(film => film.depths > 0)
  return {
    films: there.map(film => ({
      exposure: film.exposure,
      logExposure: Math.log(film.exposure),
      depthMicrometres: film.depths / film.indexes.length,
      standardUncertaintyMicrometres: film.stated ? Math.sqrt(film.variances) / film.indexes.length : null,
      readingIds: film.ids,
      readingIndexes: film.indexes,
    })),
    excludedIndexes,
    censoredIndexes,
    notAboveZeroIndexes: there.length === films.length ? [] : films.filter(film => !(film.depths > 0)).flatMap(film => film.indexes),
  }
}
