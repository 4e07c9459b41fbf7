import { expose } from 'comlink'
import type { FilmImportMapping } from '#shared/contracts/film-imports.ts'
import type { ExposureKind } from '#shared/imports/index.ts'
import { openImportFile, previewImportFile } from './import-reading.ts'

let turn = 0

export const importWorker = {
  open: (file: Blob, exposureKind: ExposureKind, chosen: Partial<Pick<FilmImportMapping, 'encoding' | 'delimiter'>>) => openImportFile(file, exposureKind, chosen),
  preview(file: Blob, mapping: FilmImportMapping, exposureKind: ExposureKind, progress: (share: number, rows: number) => void) {
    const mine = ++turn
    return previewImportFile(file, mapping, exposureKind, progress, () => mine === turn)
  },
}
export type ImportWorker = typeof importWorker

expose(importWorker)
