import { StatsError } from '../stats/types.ts'
import { collectFilms } from './collect-films.ts'
import type { FilmReading } from './types.ts'

/** Films for a fit that also uses those which did not form or were lost. */
export interface CensoredFilms {
  readonly x: readonly number[]
  /** Depth, or the limit where censored. */
  readonly depths: readonly number[]
  readonly censored: readonly boolean[]
  readonly measuredCount: number
  readonly censoredCount: number
}

/**
 * Measured films first, then one censored film for each that is missing.
 *
 * A film of which one reading was measured counts as measured; one that the gauge puts at zero or below is missing.
 *
 * @throws {StatsError} `limit-out-of-range`, and as `collectFilms`
 */
export function collectCensoredFilms(readings: readonly FilmReading[], limitMicrometres: number): CensoredFilms {
  if (!(Number.isFinite(limitMicrometres) && limitMicrometres >= 0)) {
    throw new StatsError('limit-out-of-range', `the limit must be a depth from 0 µm, got ${limitMicrometres}`)
  }
  const { films, censoredIndexes, notAboveZeroIndexes } = collectFilms(readings)
  const keyOf = (reading: FilmReading): string | null => (reading.filmId === undefined ? null : `${reading.filmId}\n${reading.exposure}`)
  const known = new Set(films.flatMap(film => film.readingIndexes).flatMap(index => {
    const reading = readings[index]
    const key = reading === undefined ? null : keyOf(reading)
    return key === null ? [] : [key]
  }))
  const missing = [...censoredIndexes, ...notAboveZeroIndexes].flatMap(index => {
    const reading = readings[index]
    if (reading === undefined) return []
    const key = keyOf(reading)
    if (key !== null && known.has(key)) return []
    if (key !== null) known.add(key)
    return [Math.log(reading.exposure)]
  })
  return {
    x: [...films.map(film => film.logExposure), ...missing],
    depths: [...films.map(film => film.depthMicrometres), ...missing.map(() => limitMicrometres)],
    censored: [...films.map(() => false), ...missing.map(() => true)],
    measuredCount: films.length,
    censoredCount: missing.length,
  }
}
