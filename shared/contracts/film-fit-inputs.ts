import type { FilmReading, WorkingCurveOptions } from '../film/index.ts'
import type { StoredFilmReading } from './film.ts'
import type { Study } from './studies.ts'

type ReadingForFit = Pick<StoredFilmReading, 'id' | 'exposure' | 'depthMicrometres' | 'standardUncertaintyMicrometres' | 'state'>
type StudyForFit = { readonly exposureKind: Study['exposureKind']; readonly film: Pick<Study['film'], 'weighting' | 'confidenceLevel' | 'columnsAre'> }

/**
 * What the working curve of a study is fitted to: one place for the browser's worker and the server, so that both see
 * the same numbers in the same order and agree to the last digit.
 */
export function filmFitInputs(study: StudyForFit, readings: readonly ReadingForFit[]): WorkingCurveOptions {
  const { weighting, confidenceLevel, columnsAre } = study.film
  return {
    exposureKind: study.exposureKind,
    weighting,
    confidenceLevel,
    readings: readings.map((reading): FilmReading => ({
      id: reading.id,
      exposure: reading.exposure,
      // A film without a depth has no number to carry; its state says so.
      depthMicrometres: reading.depthMicrometres ?? 0,
      state: reading.state,
      ...(reading.standardUncertaintyMicrometres === null ? {} : { standardUncertaintyMicrometres: reading.standardUncertaintyMicrometres }),
      ...(columnsAre === 'readings-of-one-film' ? { filmId: String(reading.exposure) } : {}),
    })),
  }
}

/** The layer rule of a study with its number, as the film model takes it. */
export function layerRuleOf(film: Pick<Study['film'], 'layerRule' | 'overcureMicrometres' | 'depthRatio'>) {
  if (film.layerRule === 'constant-overcure') return { kind: 'constant-overcure', overcureMicrometres: film.overcureMicrometres } as const
  if (film.layerRule === 'constant-ratio') return { kind: 'constant-ratio', ratio: film.depthRatio } as const
  return { kind: 'far-side-dose' } as const
}
