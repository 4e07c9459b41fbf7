import Papa from 'papaparse'
import { importBytesMax, importRowsMax, type FilmImportMapping, type RejectedRow } from '#shared/contracts/film-imports.ts'
import {
  createFilmRowReader, createRowSplitter, csvTokeniserOptions, detectDelimiter, detectEncoding, guessFilmImportMapping, headerOf, mappingProblem, tokeniserOf,
  type ExposureKind, type ImportedReading, type MappingGuess, type SplitterOutcome,
} from '#shared/imports/index.ts'

/** Enough to recognise encoding, delimiter and columns. */
const headBytes = 64_000
const sampleRowsMax = 200
const readingsShownMax = 12
const rejectedShownMax = 200
/** A Worker still answers progress between pieces of this size. */
const pieceBytes = 256_000

export interface Refusal {
  readonly kind: 'refused'
  readonly detail: string
}

export interface OpenedFile {
  readonly kind: 'opened'
  readonly sample: readonly (readonly string[])[]
  readonly guess: MappingGuess
}

export interface ImportPreview {
  readonly kind: 'read'
  readonly accepted: number
  readonly rejected: number
  readonly remarked: number
  readonly readings: readonly ImportedReading[]
  readonly rejectedRows: readonly RejectedRow[]
  readonly remarks: readonly { readonly line: number; readonly sentence: string }[]
  readonly header: readonly string[]
}

const refuse = (detail: string): Refusal => ({ kind: 'refused', detail })

function splitterFor(delimiter: FilmImportMapping['delimiter']) {
  return createRowSplitter(tokeniserOf(new Papa.Parser(csvTokeniserOptions(delimiter))))
}

/** The first rows of a file, and what its columns probably mean. */
export async function openImportFile(file: Blob, exposureKind: ExposureKind, chosen: Partial<Pick<FilmImportMapping, 'encoding' | 'delimiter'>> = {}): Promise<OpenedFile | Refusal> {
  if (file.size > importBytesMax) return refuse(`The file has more than ${importBytesMax / 1_000_000} MB. Split it and import the parts.`)
  const head = new Uint8Array(await file.slice(0, headBytes).arrayBuffer())
  const detected = detectEncoding(head)
  if (detected.kind === 'refused') return detected
  const encoding = chosen.encoding ?? detected.encoding
  const text = new TextDecoder(encoding).decode(head, { stream: file.size > headBytes })
  const delimiter = chosen.delimiter ?? detectDelimiter(text)
  const splitter = splitterFor(delimiter)
  const first = splitter.next(text)
  const last = file.size > headBytes ? null : splitter.end()
  const rows = [first, last].flatMap(outcome => (outcome?.kind === 'rows' ? outcome.rows : [])).slice(0, sampleRowsMax).map(row => row.cells)
  if (rows.length === 0) return refuse('The file has no rows.')
  return { kind: 'opened', sample: rows, guess: guessFilmImportMapping({ rows, encoding, delimiter }, exposureKind) }
}

/** Reads a whole file as the import will, without sending anything: what goes in, what does not, and why. */
export async function previewImportFile(
  file: Blob, mapping: FilmImportMapping, exposureKind: ExposureKind, progress: (share: number, rows: number) => void, isCurrent: () => boolean,
): Promise<ImportPreview | Refusal> {
  const problem = mappingProblem(mapping, exposureKind)
  if (problem !== null) return refuse(problem)
  const reader = createFilmRowReader(mapping)
  const splitter = splitterFor(mapping.delimiter)
  const decoder = new TextDecoder(mapping.encoding, { fatal: true })
  const tally = { accepted: 0, rejected: 0, remarked: 0 }
  const readings: ImportedReading[] = []
  const rejectedRows: RejectedRow[] = []
  const remarks: { line: number; sentence: string }[] = []
  const headerRows: (readonly string[])[] = []

  function take(outcome: SplitterOutcome): Refusal | null {
    if (outcome.kind === 'endless-row') return refuse(`From line ${reader.nextLine()} on the file cannot be split into cells: a quotation mark is probably never closed.`)
    for (const { cells, quotes } of outcome.rows) {
      const row = reader.row(cells, quotes)
      if (row.kind === 'file-refused') return refuse(row.sentence)
      if (row.kind === 'header') headerRows.push(row.cells)
      if (row.kind === 'rejected') {
        tally.rejected++
        if (rejectedRows.length < rejectedShownMax) rejectedRows.push({ line: row.line, cells: row.cells, reasons: row.reasons })
      }
      if (row.kind === 'reading') {
        tally.accepted++
        if (row.remarks.length > 0) tally.remarked++
        if (readings.length < readingsShownMax) readings.push(row)
        for (const sentence of row.remarks) if (remarks.length < rejectedShownMax) remarks.push({ line: row.line, sentence })
      }
      if (tally.accepted + tally.rejected > importRowsMax) return refuse(`The file has more than ${importRowsMax} rows. Split it and import the parts.`)
    }
    return null
  }

  for (let start = 0; start < file.size; start += pieceBytes) {
    if (!isCurrent()) return refuse('Another file or mapping was chosen.')
    const bytes = await file.slice(start, start + pieceBytes).arrayBuffer()
    let text: string
    try {
      text = decoder.decode(bytes, { stream: start + pieceBytes < file.size })
    } catch {
      return refuse(`The file is not written in ${mapping.encoding}. Choose another encoding and look whether its letters come out right.`)
    }
    const refusal = take(splitter.next(text))
    if (refusal !== null) return refusal
    progress(Math.min(1, (start + pieceBytes) / file.size), tally.accepted + tally.rejected)
  }
  const refusal = take(splitter.end())
  if (refusal !== null) return refusal
  if (tally.accepted + tally.rejected === 0) return refuse('The file has a header, but no rows below it.')
  return { kind: 'read', ...tally, readings, rejectedRows, remarks, header: headerOf(headerRows, headerRows.length) }
}
