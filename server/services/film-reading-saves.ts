import type { FilmReadingSave } from '#shared/contracts/film.ts'
import type { ReadingRow } from '../repositories/film-readings.ts'

export type SaveVerdict =
  /** Nothing to do: the cell stands as sent (a save that was sent again). */
  | { readonly kind: 'same'; readonly row: ReadingRow }
  | { readonly kind: 'insert' }
  | { readonly kind: 'update'; readonly row: ReadingRow }
  /** The reading itself was changed meanwhile; `row` null: there is no such reading in this study. */
  | { readonly kind: 'stale'; readonly row: ReadingRow | null }
  /** Another reading stands in the cell: a stored one, or one of this same save. */
  | { readonly kind: 'occupied'; readonly by: string }

export interface SaveFacts {
  readonly byId: ReadonlyMap<string, ReadingRow>
  /** Live readings in the cells that the save names. */
  readonly inCells: readonly ReadingRow[]
  /** Ids that belong to another study. */
  readonly elsewhere: ReadonlySet<string>
  readonly actorUserId: string
}

const compared = ['exposure', 'exposureText', 'replicate', 'depthMicrometres', 'depthText', 'standardUncertaintyMicrometres', 'state', 'exclusionReason', 'note', 'withdrawn'] as const

const sameContent = (cell: FilmReadingSave, row: ReadingRow) => compared.every(field => cell[field] === row[field])
const cellKey = (cell: { readonly exposure: number; readonly replicate: number }) => `${cell.exposure} ${cell.replicate}`

function verdictByVersion(cell: FilmReadingSave, facts: SaveFacts): SaveVerdict {
  const row = facts.byId.get(cell.id)
  if (row === undefined) {
    return facts.elsewhere.has(cell.id) || cell.baseVersion !== null ? { kind: 'stale', row: null } : { kind: 'insert' }
  }
  if (sameContent(cell, row)) return { kind: 'same', row }
  // Made by this person and never touched since: the answer to the first sending was lost and they typed on.
  const typedOn = cell.baseVersion === null && row.version === 1 && row.enteredByUserId === facts.actorUserId && row.importBatchId === null
  return cell.baseVersion === row.version || typedOn ? { kind: 'update', row } : { kind: 'stale', row }
}

/**
 * What becomes of each cell of one save. Ids are different from each other.
 *
 * Cells are judged together, because one may leave a place that another takes; a cell that is refused keeps its old
 * place, which may refuse the next one, so the judgement is repeated until nothing changes.
 */
export function decideSaves(cells: readonly FilmReadingSave[], facts: SaveFacts): readonly SaveVerdict[] {
  const verdicts = cells.map(cell => verdictByVersion(cell, facts))
  for (let changed = true; changed;) {
    changed = false
    const leaving = new Set(cells.filter((_, i) => verdicts[i]?.kind === 'update').map(cell => cell.id))
    const occupants = new Map(facts.inCells.filter(row => !leaving.has(row.id)).map(row => [cellKey(row), row.id]))
    cells.forEach((cell, i) => {
      const verdict = verdicts[i]
      if (cell.withdrawn || (verdict?.kind !== 'insert' && verdict?.kind !== 'update')) return
      const occupant = occupants.get(cellKey(cell))
      if (occupant === undefined) {
        occupants.set(cellKey(cell), cell.id)
      } else {
        verdicts[i] = { kind: 'occupied', by: occupant }
        // Only an update held a place before; a refused insert frees nothing and blocks nothing.
        if (verdict.kind === 'update') changed = true
      }
    })
  }
  return verdicts
}
