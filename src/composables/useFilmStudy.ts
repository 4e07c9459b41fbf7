import { proxy } from 'comlink'
import { computed, shallowRef, watch } from 'vue'
import type { Study } from '#shared/contracts/studies.ts'
import { useFilmAnswer } from './useFilmAnswer.ts'
import { useFilmGrid } from './useFilmGrid.ts'
import { useFilmOutbox } from './useFilmOutbox.ts'
import { useFilmWorker } from './useFilmWorker.ts'
import type { StudyPlace } from './useStudy.ts'

export type ReadingsState =
  | { readonly kind: 'busy'; readonly loaded: number; readonly total: number }
  | { readonly kind: 'failed'; readonly sentence: string; readonly reason: 'offline' | 'signed-out' | 'other' }
  | { readonly kind: 'ready'; readonly readingsRevision: number }

/** Film of one study: readings in the worker, the grid, what waits to be sent, and the answer. */
export function useFilmStudy(place: () => StudyPlace, study: () => Study | undefined, userId: () => string) {
  const worker = useFilmWorker()
  const readings = shallowRef<ReadingsState>({ kind: 'busy', loaded: 0, total: 0 })
  /** Rises whenever the worker's readings change. */
  const generation = shallowRef(0)

  const outbox = useFilmOutbox(place, userId, async (results, revisions) => {
    if (results.length === 0) return
    // Our own saves need no reading again; a jump means that somebody else saved between.
    for (const { studyId, readingsRevision } of revisions) {
      if (studyId === place().studyId && readings.value.kind === 'ready' && readingsRevision === readings.value.readingsRevision + 1) readings.value = { kind: 'ready', readingsRevision }
    }
    await grid.takeSaved(results)
    generation.value++
  })
  const grid = useFilmGrid(study, worker, () => outbox)
  const ready = () => (readings.value.kind === 'ready' ? generation.value : null)
  const answer = useFilmAnswer(study, () => grid.over.value, ready, worker)

  let loading = 0
  let busy = false
  async function load(): Promise<void> {
    const turn = ++loading
    busy = true
    // A reload behind a page that already shows something must not blank it.
    if (readings.value.kind !== 'ready') readings.value = { kind: 'busy', loaded: 0, total: 0 }
    const outcome = await worker.load({ ...place() }, proxy((loaded: number, total: number) => {
      if (turn === loading && readings.value.kind === 'busy') readings.value = { kind: 'busy', loaded, total }
    }))
    if (turn !== loading) return
    busy = false
    if (outcome.kind === 'failed') {
      if (readings.value.kind !== 'ready') readings.value = outcome
      return
    }
    await grid.refresh()
    readings.value = { kind: 'ready', readingsRevision: outcome.readingsRevision }
    generation.value++
    loadIfBehind()
  }
  /** Somebody else's tablet, or an import, moved the readings on; a reading that is under way may already bring it. */
  function loadIfBehind(): void {
    const revision = study()?.readingsRevision
    if (!busy && revision !== undefined && readings.value.kind === 'ready' && revision > readings.value.readingsRevision) void load()
  }
  watch(() => place().studyId, () => {
    readings.value = { kind: 'busy', loaded: 0, total: 0 }
    void load()
  }, { immediate: true })

  watch(() => study()?.readingsRevision, loadIfBehind)

  return { worker, readings: computed(() => readings.value), load, outbox, grid, ...answer }
}
export type FilmStudyHandle = ReturnType<typeof useFilmStudy>
