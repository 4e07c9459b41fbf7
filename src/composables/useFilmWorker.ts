import { releaseProxy, wrap, type Remote } from 'comlink'
import { onScopeDispose } from 'vue'
import type { FilmWorker } from '@/workers/film-worker.ts'

export type FilmWorkerHandle = Remote<FilmWorker>

/** The worker in which readings are kept and curves are fitted; it ends with the page. */
export function useFilmWorker(): FilmWorkerHandle {
  const worker = new Worker(new URL('../workers/film-worker.ts', import.meta.url), { type: 'module' })
  const handle = wrap<FilmWorker>(worker)
  onScopeDispose(() => {
    handle[releaseProxy]()
    worker.terminate()
  })
  return handle
}
