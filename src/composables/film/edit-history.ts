import type { CellContent } from './film-cells.ts'

export interface CellChange {
  readonly id: string
  /** Null: the place was empty. */
  readonly before: CellContent | null
  readonly after: CellContent | null
}

export interface Edit {
  /** What the undo button says: "85 µm at 1.7 s". */
  readonly label: string
  readonly changes: readonly CellChange[]
}

export interface EditHistory {
  readonly done: readonly Edit[]
  readonly undone: readonly Edit[]
}

export const emptyHistory: EditHistory = { done: [], undone: [] }
const editsMax = 200

/** A new edit ends what could be done again. */
export const withEdit = (history: EditHistory, edit: Edit): EditHistory => ({ done: [...history.done, edit].slice(-editsMax), undone: [] })

const reversed = (edit: Edit): readonly CellChange[] =>
  [...edit.changes].reverse().map(({ id, before, after }) => ({ id, before: after, after: before }))

export interface HistoryStep {
  readonly history: EditHistory
  /** What must now be applied to the cells. */
  readonly changes: readonly CellChange[]
  readonly label: string
}

/** Takes the last edit back; null where there is none. */
export function undo(history: EditHistory): HistoryStep | null {
  const edit = history.done.at(-1)
  if (edit === undefined) return null
  return { history: { done: history.done.slice(0, -1), undone: [...history.undone, edit] }, changes: reversed(edit), label: edit.label }
}

/** Does again what was taken back; null where there is nothing. */
export function redo(history: EditHistory): HistoryStep | null {
  const edit = history.undone.at(-1)
  if (edit === undefined) return null
  return { history: { done: [...history.done, edit], undone: history.undone.slice(0, -1) }, changes: edit.changes, label: edit.label }
}
