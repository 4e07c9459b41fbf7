import Papa from 'papaparse'
import type { FilmImportMapping, RejectedRow } from '#shared/contracts/film-imports.ts'
import { importBytesMax, importRowsMax } from '#shared/contracts/film-imports.ts'
import {
  cellCharactersMax, createFilmRowReader, createRowSplitter, csvTokeniserOptions, detectEncoding, headerOf, shortened, tokeniserOf,
  type ImportedReading, type SplitterOutcome,
} from '#shared/imports/index.ts'
import { AppError } from '../errors.ts'

/** Rejected rows kept to be given back; all are counted. */
export const rejectedRowsKeptMax = 10_000
/** Together they hold at most this many characters, however wide the rows are. */
const rejectedCharactersKeptMax = 5_000_000

export interface ParsedImport {
  readonly readings: readonly ImportedReading[]
  /** The first rejected rows, to give back as CSV. */
  readonly rejected: readonly RejectedRow[]
  /** All of them, also those not kept. */
  readonly rejectedRows: number
  /** Names of the columns, several header rows joined; empty where the file has none. */
  readonly header: readonly string[]
}

export function refuseImport(detail: string): AppError {
  return new AppError('import-refused', { detail: `${detail} Nothing was imported.` })
}

/** Zero bytes cannot be stored as text; the replacement character shows where one stood. */
const storable = (cell: string) => shortened(cell.replaceAll('\0', '\uFFFD'), cellCharactersMax)

class RejectedRows {
  readonly kept: RejectedRow[] = []
  count = 0
  private characters = 0

  add(row: RejectedRow): void {
    this.count++
    if (this.kept.length >= rejectedRowsKeptMax || this.characters >= rejectedCharactersKeptMax) return
    const kept = { line: row.line, cells: row.cells.map(storable), reasons: row.reasons }
    this.characters += kept.cells.reduce((sum, cell) => sum + cell.length + 3, 0)
    this.kept.push(kept)
  }
}

/** Decodes the stream strictly: a byte that does not belong to the encoding refuses the file instead of becoming a lozenge. */
async function* decoded(body: AsyncIterable<Uint8Array>, encoding: FilmImportMapping['encoding']): AsyncGenerator<string> {
  const decoder = new TextDecoder(encoding, { fatal: true })
  const decode = (bytes: Uint8Array | undefined) => {
    try {
      return bytes === undefined ? decoder.decode() : decoder.decode(bytes, { stream: true })
    } catch {
      throw refuseImport(`The file is not written in ${encoding}. Choose another encoding in the preview and look whether its letters come out right.`)
    }
  }
  let bytesRead = 0
  let head: Uint8Array | null = new Uint8Array(0)
  for await (const chunk of body) {
    bytesRead += chunk.length
    if (bytesRead > importBytesMax) throw tooManyBytes()
    let piece = chunk
    if (head !== null) {
      piece = head.length === 0 ? chunk : Buffer.concat([head, chunk])
      // Enough to recognise what kind of file it is.
      if (piece.length < 512) {
        head = piece
        continue
      }
      head = null
      checkHead(piece, encoding)
    }
    yield decode(piece)
  }
  if (head !== null) {
    checkHead(head, encoding)
    yield decode(head)
  }
  yield decode(undefined)
}

export function tooManyBytes(): AppError {
  return new AppError('body-too-large', { detail: `The file has more than ${importBytesMax / 1_000_000} MB. Split it and import the parts. Nothing was imported.` })
}

function checkHead(head: Uint8Array, encoding: FilmImportMapping['encoding']): void {
  const found = detectEncoding(head)
  if (found.kind === 'refused') throw refuseImport(found.detail)
  if (found.byteOrderMark && found.encoding !== encoding) {
    throw refuseImport(`The file says that it is written in ${found.encoding}, the mapping says ${encoding}.`)
  }
}

/**
 * Reads a whole upload into readings and rejected rows, before anything is written: a file that breaks off, is too long
 * or is no CSV leaves no trace.
 *
 * @throws {AppError} `import-refused` or `body-too-large` with what to do about it
 */
export async function parseImport(body: AsyncIterable<Uint8Array>, mapping: FilmImportMapping): Promise<ParsedImport> {
  const reader = createFilmRowReader(mapping)
  const splitter = createRowSplitter(tokeniserOf(new Papa.Parser(csvTokeniserOptions(mapping.delimiter))))
  const readings: ImportedReading[] = []
  const rejected = new RejectedRows()
  const headerRows: (readonly string[])[] = []

  const take = (outcome: SplitterOutcome) => {
    if (outcome.kind === 'endless-row') {
      throw refuseImport(`From line ${reader.nextLine()} on the file cannot be split into cells: a quotation mark is probably never closed.`)
    }
    for (const { cells, quotes } of outcome.rows) {
      const row = reader.row(cells, quotes)
      if (row.kind === 'file-refused') throw refuseImport(row.sentence)
      if (row.kind === 'header') headerRows.push(row.cells)
      if (row.kind === 'rejected') rejected.add(row)
      if (row.kind === 'reading') readings.push(row)
      if (readings.length + rejected.count > importRowsMax) {
        throw refuseImport(`The file has more than ${importRowsMax} rows. Split it and import the parts.`)
      }
    }
  }
  for await (const text of decoded(body, mapping.encoding)) take(splitter.next(text))
  take(splitter.end())

  if (readings.length + rejected.count === 0) {
    throw refuseImport(headerRows.length === 0 ? 'The file has no rows.' : 'The file has a header, but no rows below it.')
  }
  return { readings, rejected: rejected.kept, rejectedRows: rejected.count, header: headerOf(headerRows, headerRows.length).map(storable) }
}
