import { computed, shallowRef, watch } from 'vue'
import { v7 } from 'uuid'
import type { FilmReadingSaved, StoredFilmReading } from '#shared/contracts/film.ts'
import type { Study } from '#shared/contracts/studies.ts'
import { readingOf, versionOf, type OutboxEntry } from '@/api/film-outbox.ts'
import type { GridPage, GridWindow, TypedOver } from '@/workers/reading-book.ts'
import { emptyHistory, redo, undo, withEdit, type CellChange, type EditHistory } from './film/edit-history.ts'
import { cellsOf, contentOfCell, placeKey, type CellContent, type CellPlace, type FilmCell } from './film/film-cells.ts'
import { plannedPlaces } from './film/grid-moves.ts'
import { contentFromTyped, readTypedCell, type TypedCell } from './film/read-typed.ts'
import type { FilmWorkerHandle } from './useFilmWorker.ts'
import type { FilmOutboxHandle } from './useFilmOutbox.ts'

const rowsShown = 30
const columnsShown = 6
const noPage: GridPage = { rows: [], readings: [], rowTotal: 0, exposureTotal: 0, columnTotal: 0, readingTotal: 0 }

export interface GridFilter {
  readonly from: number | null
  readonly to: number | null
}

/** The entry grid: a window on the stored readings with what was typed laid over it, edits with undo, and what the fit must see. */
export function useFilmGrid(study: () => Study | undefined, worker: FilmWorkerHandle, outbox: () => FilmOutboxHandle) {
  const page = shallowRef<GridPage>(noPage)
  const rowOffset = shallowRef(0)
  const columnOffset = shallowRef(0)
  const filter = shallowRef<GridFilter>({ from: null, to: null })
  const added = shallowRef<ReadonlyMap<number, string>>(new Map())
  const history = shallowRef<EditHistory>(emptyHistory)
  const draft = shallowRef<(CellPlace & { readonly text: string }) | null>(null)
  /** Versions the server is known to hold, also of withdrawn readings: an undo stands on them. */
  const versions = new Map<string, number>()

  const entries = computed(() => outbox().entries.value)
  const plan = computed(() => study()?.film.plan?.exposures ?? [])
  const extraExposures = computed(() => [...new Set([...plan.value, ...added.value.keys(), ...entries.value.filter(entry => !entry.save.withdrawn).map(entry => entry.save.exposure)])])
  const window = computed((): GridWindow => ({
    rowOffset: rowOffset.value, rowCount: rowsShown, columnOffset: columnOffset.value, columnCount: columnsShown + 1,
    exposureFrom: filter.value.from, exposureTo: filter.value.to, extraExposures: extraExposures.value,
  }))

  async function refresh(): Promise<void> {
    const next = await worker.page(window.value)
    for (const reading of next.readings) versions.set(reading.id, reading.version)
    page.value = next
  }
  watch(window, () => void refresh())

  const cells = computed(() => cellsOf(page.value.readings, entries.value))
  const exposures = computed(() => page.value.rows.map(row => row.exposure))
  const texts = computed(() => {
    const found = new Map<number, string>(plan.value.map(exposure => [exposure, String(exposure)]))
    for (const cell of cells.value.values()) found.set(cell.exposure, cell.exposureText)
    for (const [exposure, text] of added.value) found.set(exposure, text)
    return found
  })
  /** Films that rows are meant to have: as many as the fullest has, or the plan asks for. */
  const filmsPerRow = computed(() => {
    const planned = plannedPlaces(plan.value).map(place => place.replicate)
    const typed = [...cells.value.values()].map(cell => cell.replicate)
    return Math.max(1, page.value.columnTotal, ...planned, ...typed)
  })
  const columns = computed(() => {
    const all = filmsPerRow.value + 1
    const last = Math.min(all, columnOffset.value + columnsShown)
    return Array.from({ length: Math.max(0, last - columnOffset.value) }, (_, i) => columnOffset.value + i + 1)
  })

  function apply(changes: readonly CellChange[]): Promise<void> {
    return outbox().put(changes.flatMap(({ id, before, after }) => {
      const content = after ?? (before === null ? null : { ...before, withdrawn: true })
      if (content === null) return []
      const unreadable = content.state === 'measured' && content.depthMicrometres === null && !content.withdrawn ? sentenceOf(content) : null
      return [{ save: { ...content, id, baseVersion: versions.get(id) ?? null }, unreadable }]
    }))
  }

  function sentenceOf(content: CellContent): string {
    const typed = readTyped(content.depthText)
    return typed.kind === 'unreadable' ? typed.sentence : 'Type the thickness.'
  }

  function readTyped(text: string): TypedCell {
    const film = study()?.film
    return readTypedCell(text, { entryUnit: film?.entryUnit ?? 'mm', substrateThicknessMicrometres: film?.substrateThicknessMicrometres ?? 0 })
  }

  async function edit(label: string, changes: readonly CellChange[]): Promise<void> {
    if (changes.length === 0) return
    history.value = withEdit(history.value, { label, changes })
    await apply(changes)
  }

  function changeFor(place: CellPlace & { readonly exposureText: string }, typed: TypedCell): CellChange | null {
    const cell = cells.value.get(placeKey(place)) ?? null
    const after = contentFromTyped(typed, place, cell)
    if (cell === null && after === null) return null
    return { id: cell?.id ?? v7(), before: cell === null ? null : contentOfCell(cell), after: cell !== null && after !== null ? { ...after, exposureText: cell.exposureText } : after }
  }

  /** A text typed into a cell; what stands there already changes nothing. */
  async function typeCell(place: CellPlace, text: string): Promise<void> {
    draft.value = null
    const cell = cells.value.get(placeKey(place))
    if (cell !== undefined && text.trim() === shownText(cell)) return
    const change = changeFor({ ...place, exposureText: texts.value.get(place.exposure) ?? String(place.exposure) }, readTyped(text))
    if (change !== null) await edit(`${text.trim() === '' ? 'clearing' : text.trim()} at ${place.exposure}`, [change])
  }

  /** Many cells in one step, so that one undo takes them all back. */
  async function typeMany(label: string, typed: readonly (CellPlace & { readonly exposureText: string; readonly text: string })[]): Promise<void> {
    const rows = new Map(added.value)
    for (const { exposure, exposureText } of typed) if (!exposures.value.includes(exposure)) rows.set(exposure, exposureText)
    added.value = rows
    await edit(label, typed.flatMap(place => (place.text === '' ? [] : (changeFor(place, readTyped(place.text)) ?? []))))
  }

  async function setState(cell: FilmCell | null, place: CellPlace, state: 'no-film' | 'lost-in-wash' | 'measured' | 'excluded', reason: string | null): Promise<void> {
    const base = cell === null ? contentFromTyped({ kind: 'state', state: 'no-film' }, { ...place, exposureText: texts.value.get(place.exposure) ?? String(place.exposure) }, null) : contentOfCell(cell)
    if (base === null) return
    // The thickness stays beside an exclusion, so that taking it back restores it.
    const keepsDepth = state === 'excluded' || state === 'measured'
    const after = { ...base, state, exclusionReason: state === 'excluded' ? reason : null, ...(keepsDepth ? {} : { depthMicrometres: null, depthText: '' }) }
    await edit(`${state} at ${place.exposure}`, [{ id: cell?.id ?? v7(), before: cell === null ? null : contentOfCell(cell), after }])
  }

  async function step(take: typeof undo): Promise<string | null> {
    const next = take(history.value)
    if (next === null) return null
    history.value = next.history
    await apply(next.changes)
    return next.label
  }

  /** What the server answered to saved cells. */
  async function takeSaved(results: readonly FilmReadingSaved[]): Promise<void> {
    const stored: StoredFilmReading[] = []
    const withdrawn: string[] = []
    for (const result of results) {
      if (result.kind !== 'stale') versions.set(result.id, versionOf(result))
      const reading = readingOf(result)
      if (reading !== null) stored.push(reading)
      if (result.kind === 'withdrawn') withdrawn.push(result.id)
    }
    await worker.take(study()?.id ?? '', stored, withdrawn)
    await refresh()
  }

  async function takeTheirs(entry: OutboxEntry): Promise<void> {
    if (entry.status.kind === 'stale') {
      const { current } = entry.status
      await worker.take(study()?.id ?? '', current === null ? [] : [current], current === null ? [entry.save.id] : [])
      await refresh()
    }
    await outbox().drop(entry)
  }

  const over = computed((): TypedOver => {
    const usable = entries.value.filter(entry => entry.status.kind !== 'stale')
    const typed = usable.filter(entry => entry.status.kind !== 'unreadable' && !entry.save.withdrawn).map(entry => entry.save)
    const hiddenIds = usable.map(entry => entry.save.id)
    const live = draft.value === null ? null : changeFor({ ...draft.value, exposureText: '' }, readTyped(draft.value.text))
    if (live === null || live.after === null || (live.after.state === 'measured' && live.after.depthMicrometres === null)) return { typed, hiddenIds }
    return { typed: [...typed.filter(save => save.id !== live.id), { ...live.after, id: live.id }], hiddenIds: [...hiddenIds, live.id] }
  })

  function addExposure(exposure: number, text: string): void {
    added.value = new Map([...added.value, [exposure, text]])
  }
  /** Puts a row on the page that is shown. */
  function showAll(): void {
    filter.value = { from: null, to: null }
    rowOffset.value = 0
  }

  return {
    page, cells, exposures, texts, columns, columnsShown, rowsShown, filmsPerRow, rowOffset, columnOffset, filter, plan, draft, over,
    canUndo: computed(() => history.value.done.at(-1)?.label ?? null), canRedo: computed(() => history.value.undone.at(-1)?.label ?? null),
    refresh, typeCell, typeMany, setState, undo: () => step(undo), redo: () => step(redo), takeSaved, takeTheirs, addExposure, showAll,
  }
}
export type FilmGridHandle = ReturnType<typeof useFilmGrid>

/** What a cell shows in its box: the words of a state, or the number as typed. */
export function shownText(cell: FilmCell): string {
  if (cell.state === 'no-film') return 'no film'
  if (cell.state === 'lost-in-wash') return 'lost'
  return cell.depthText === '' && cell.depthMicrometres !== null ? `${Number(cell.depthMicrometres.toPrecision(6))} µm` : cell.depthText
}
