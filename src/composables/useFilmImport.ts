import { proxy, releaseProxy, wrap, type Remote } from 'comlink'
import { v7 } from 'uuid'
import { computed, onScopeDispose, shallowRef } from 'vue'
import { findImportMapping, type FilmImportMapping, type ImportBatch } from '#shared/contracts/film-imports.ts'
import { call } from '@/api/call.ts'
import { uploadFilmImport } from '@/api/film-imports.ts'
import type { ImportPreview, OpenedFile } from '@/workers/import-reading.ts'
import type { ImportWorker } from '@/workers/import-worker.ts'
import type { StudyPlace } from './useStudy.ts'

export type ImportState =
  | { readonly kind: 'idle' }
  | { readonly kind: 'opening' }
  | { readonly kind: 'reading'; readonly share: number; readonly rows: number }
  | { readonly kind: 'ready' }
  | { readonly kind: 'sending'; readonly share: number }
  | { readonly kind: 'done'; readonly batch: ImportBatch; readonly alreadyImported: boolean }
  | { readonly kind: 'refused'; readonly detail: string }
  /** Sending failed: the same batch may be sent again without doubling. */
  | { readonly kind: 'failed'; readonly error: unknown }

/** One CSV file on its way in: opened, mapped, previewed and sent; the reading happens in a worker. */
export function useFilmImport(place: () => StudyPlace, exposureKind: () => 'seconds' | 'mJ/cm2', onImported: () => void) {
  let started: { readonly worker: Worker; readonly handle: Remote<ImportWorker> } | null = null
  /** Only who chooses a file loads what reads it. */
  function reader(): Remote<ImportWorker> {
    if (started === null) {
      const worker = new Worker(new URL('../workers/import-worker.ts', import.meta.url), { type: 'module' })
      started = { worker, handle: wrap<ImportWorker>(worker) }
    }
    return started.handle
  }
  onScopeDispose(() => {
    started?.handle[releaseProxy]()
    started?.worker.terminate()
  })

  const file = shallowRef<File | null>(null)
  const state = shallowRef<ImportState>({ kind: 'idle' })
  const opened = shallowRef<OpenedFile | null>(null)
  const mapping = shallowRef<FilmImportMapping | null>(null)
  const remembered = shallowRef(false)
  const preview = shallowRef<ImportPreview | null>(null)
  let batchId = v7()
  let turn = 0

  async function open(next: File): Promise<void> {
    const mine = ++turn
    file.value = next
    preview.value = null
    opened.value = null
    mapping.value = null
    remembered.value = false
    batchId = v7()
    state.value = { kind: 'opening' }
    const outcome = await reader().open(next, exposureKind(), {})
    if (mine !== turn) return
    if (outcome.kind === 'refused') {
      state.value = outcome
      return
    }
    opened.value = outcome
    const kept = outcome.guess.header.length === 0 ? null : await call(findImportMapping, { params: { shopId: place().shopId }, body: { header: outcome.guess.header.slice(0, 500).map(cell => cell.slice(0, 500)) } }).then(answer => answer.mapping, () => null)
    if (mine !== turn) return
    remembered.value = kept !== null
    // The remembered columns and units; the bytes of this very file decide how it is written.
    mapping.value = kept !== null && outcome.guess.mapping !== null
      ? { ...kept, encoding: outcome.guess.mapping.encoding, delimiter: outcome.guess.mapping.delimiter, decimalMark: outcome.guess.mapping.decimalMark }
      : outcome.guess.mapping
    if (mapping.value === null) state.value = { kind: 'refused', detail: outcome.guess.remarks.join(' ') }
    else await read()
  }

  async function read(): Promise<void> {
    const mine = ++turn
    if (file.value === null || mapping.value === null) return
    state.value = { kind: 'reading', share: 0, rows: 0 }
    const outcome = await reader().preview(file.value, { ...mapping.value }, exposureKind(), proxy((share: number, rows: number) => {
      if (mine === turn) state.value = { kind: 'reading', share, rows }
    }))
    if (mine !== turn) return
    if (outcome.kind === 'refused') {
      preview.value = null
      state.value = outcome
    } else {
      preview.value = outcome
      state.value = { kind: 'ready' }
    }
  }

  /** Another meaning of the columns: the file is read again, and is another batch. */
  async function choose(change: Partial<FilmImportMapping>): Promise<void> {
    if (mapping.value === null || file.value === null) return
    mapping.value = { ...mapping.value, ...change }
    batchId = v7()
    if (change.encoding !== undefined || change.delimiter !== undefined) {
      const outcome = await reader().open(file.value, exposureKind(), { encoding: mapping.value.encoding, delimiter: mapping.value.delimiter })
      if (outcome.kind === 'opened') opened.value = outcome
    }
    await read()
  }

  async function send(): Promise<void> {
    if (file.value === null || mapping.value === null || preview.value === null) return
    const mine = ++turn
    state.value = { kind: 'sending', share: 0 }
    try {
      const answer = await uploadFilmImport({ ...place(), batchId, file: file.value, mapping: mapping.value, header: preview.value.header }, share => {
        if (mine === turn) state.value = { kind: 'sending', share }
      })
      state.value = { kind: 'done', batch: answer.batch, alreadyImported: answer.alreadyImported }
      onImported()
    } catch (error) {
      state.value = { kind: 'failed', error }
    }
  }

  function forget(): void {
    turn++
    file.value = null
    preview.value = null
    opened.value = null
    mapping.value = null
    state.value = { kind: 'idle' }
  }

  return { file: computed(() => file.value), state, opened, mapping, remembered, preview, open, choose, send, forget }
}
export type FilmImportHandle = ReturnType<typeof useFilmImport>
