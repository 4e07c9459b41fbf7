import type { FilmReadingSave, StoredFilmReading } from '#shared/contracts/film.ts'
import type { OutboxEntry } from '@/api/film-outbox.ts'

/** What a person can change of one cell. */
export type CellContent = Omit<FilmReadingSave, 'id' | 'baseVersion'>

/** One place of the entry grid. */
export interface CellPlace {
  readonly exposure: number
  readonly replicate: number
}

/** A filled place: what stands there now, whether the server knows it, and what is wrong with it. */
export interface FilmCell extends CellContent {
  readonly id: string
  /** Version the server is known to hold; null for a cell it has never seen. */
  readonly version: number | null
  readonly importBatchId: string | null
  readonly entry: OutboxEntry | null
}

export const placeKey = (place: CellPlace): string => `${place.exposure}|${place.replicate}`

const contentOf = (reading: StoredFilmReading): CellContent => ({
  exposure: reading.exposure, exposureText: reading.exposureText, replicate: reading.replicate,
  depthMicrometres: reading.depthMicrometres, depthText: reading.depthText, standardUncertaintyMicrometres: reading.standardUncertaintyMicrometres,
  state: reading.state, exclusionReason: reading.exclusionReason, note: reading.note, withdrawn: false,
})

/**
 * What the grid shows: stored readings, overlaid by what was typed and is not stored yet.
 *
 * @returns the cells by place; a withdrawn cell has none
 */
export function cellsOf(stored: readonly StoredFilmReading[], entries: readonly OutboxEntry[]): ReadonlyMap<string, FilmCell> {
  const byId = new Map(entries.map(entry => [entry.save.id, entry]))
  const cells = new Map<string, FilmCell>()
  for (const reading of stored) {
    if (byId.has(reading.id)) continue
    cells.set(placeKey(reading), { ...contentOf(reading), id: reading.id, version: reading.version, importBatchId: reading.importBatchId, entry: null })
  }
  for (const entry of entries) {
    const { id, baseVersion, ...content } = entry.save
    if (content.withdrawn && entry.status.kind !== 'stale') continue
    cells.set(placeKey(content), { ...content, id, version: baseVersion, importBatchId: null, entry })
  }
  return cells
}

/** The content of a cell without what surrounds it: what an undo goes back to. */
export function contentOfCell(cell: FilmCell): CellContent {
  const { id: _id, version: _version, importBatchId: _batch, entry: _entry, ...content } = cell
  return content
}
