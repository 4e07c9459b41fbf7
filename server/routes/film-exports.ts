import { exportFilm, exportFilmFit, exportFilmReadings } from '#shared/contracts/film.ts'
import { exportFilmChapter, exportFit, exportReadings } from '../services/film-exports.ts'
import type { Binder } from './binder.ts'
import { sendFile } from './send-file.ts'

export function filmExportRoutes(binder: Binder): void {
  binder.implementInShop(exportFilmReadings, async ({ params, database, response }) => {
    sendFile(response, { type: 'text/csv', ...(await exportReadings(database, params)) })
  })
  binder.implementInShop(exportFilmFit, async ({ params, database, response }) => {
    sendFile(response, { type: 'text/csv', ...(await exportFit(database, params)) })
  })
  binder.implementInShop(exportFilm, async ({ params, response }) => {
    sendFile(response, { type: 'application/json', ...(await exportFilmChapter(binder.dependencies, params)) })
  })
}
