import { getFilmFit, getFilmReadingHistory, listFilmReadings, saveFilmReadings } from '#shared/contracts/film.ts'
import { readFilmFit } from '../services/film-fit.ts'
import { historyOfReading, pageOfReadings, saveReadings } from '../services/film-readings.ts'
import type { Binder } from './binder.ts'

export function filmRoutes(binder: Binder): void {
  binder.implementInShop(listFilmReadings, ({ params, query, database }) => pageOfReadings(database, params, query))
  binder.implementInShop(saveFilmReadings, ({ params, body, database, actor }) => saveReadings(database, params, body.readings, actor))
  binder.implementInShop(getFilmReadingHistory, ({ params, database }) => historyOfReading(database, params, params.readingId))
  binder.implementInShop(getFilmFit, async ({ params, database }) => {
    const { inputsHash, libraryVersion, outcome } = await readFilmFit(database, params)
    return { inputsHash, libraryVersion, outcome }
  })
}
