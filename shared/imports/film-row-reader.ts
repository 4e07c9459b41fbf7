import type { FilmImportMapping, RejectedRow } from '../contracts/film-imports.ts'
import { mappingWidthProblem } from './mapping-problem.ts'
import { readFilmRow, type ImportedReading } from './read-film-row.ts'
import type { QuoteState } from './row-splitter.ts'

/** Widest row that a mapping can point into (columns 0 to 499). */
export const columnsMax = 500

export type ReaderOutcome =
  | { readonly kind: 'header'; readonly cells: readonly string[] }
  | { readonly kind: 'blank' }
  | ImportedReading
  | ({ readonly kind: 'rejected' } & RejectedRow)
  /** The mapping does not fit the file: nothing of it can be imported. */
  | { readonly kind: 'file-refused'; readonly sentence: string }

export interface FilmRowReader {
  /** The next row of the file, with what the tokeniser said about its quotation marks. */
  row(cells: readonly string[], quotes?: QuoteState): ReaderOutcome
  /** Line of the file, from 1, on which the next row begins. */
  nextLine(): number
}

const lineBreaksIn = (cells: readonly string[]) => cells.reduce((sum, cell) => sum + (cell.includes('\n') ? cell.split('\n').length - 1 : 0), 0)

/**
 * Reads the rows of one file in their order: skips header rows and blank rows, counts lines (a quoted cell may hold line
 * ends), and refuses rows wider than the table, because an unquoted decimal comma makes two plausible cells of one.
 *
 * The rows come from `createRowSplitter`, in the file's order.
 *
 * @example
 * const reader = createFilmRowReader(mapping)
 * for (const { cells, quotes } of rows) handle(reader.row(cells, quotes))
 */
export function createFilmRowReader(mapping: FilmImportMapping): FilmRowReader {
  let rowsSeen = 0
  let line = 1
  let width: number | null = null
  /** Decided on the first data row; later short rows are rejected one by one. */
  let fits = false
  const firstLineOf = new Map<string, number>()

  /** Two rows for one film of one exposure: which one holds is not ours to say. */
  const sameFilm = (reading: ImportedReading): number | null => {
    if (reading.replicateText === null) return null
    const key = `${reading.exposure}\u001f${reading.replicateText}`
    const former = firstLineOf.get(key)
    if (former === undefined) firstLineOf.set(key, reading.line)
    return former ?? null
  }

  return {
    nextLine: () => line,
    row(cells, quotes = 'paired') {
      const rowLine = line
      line += 1 + lineBreaksIn(cells)
      if (quotes === 'unclosed') {
        return { kind: 'file-refused', sentence: `A quotation mark in line ${rowLine} or after it is never closed, so the rest of the file cannot be split into cells. Mend it and import again.` }
      }
      const isHeader = rowsSeen < mapping.headerRows
      rowsSeen++
      let filled = cells.length
      while (filled > 0 && (cells[filled - 1] ?? '').trim() === '') filled--
      // Several header rows: the widest is the table's.
      if (isHeader) {
        width = Math.max(width ?? 0, cells.length)
        return { kind: 'header', cells }
      }
      if (filled === 0) return { kind: 'blank' }
      const rejected = (...reasons: string[]): ReaderOutcome => ({ kind: 'rejected', line: rowLine, cells: [...cells], reasons })
      const lastLine = line - 1
      if (quotes === 'damaged') {
        return rejected(lastLine > rowLine
          ? `Quotation marks do not pair up: lines ${rowLine} to ${lastLine} run together.`
          : 'Quotation marks do not pair up.')
      }
      if (filled > columnsMax) return rejected(`The row has ${filled} cells; at most ${columnsMax} can be read.`)
      width ??= cells.length
      const misfit = mappingWidthProblem(mapping, Math.max(width, filled))
      if (misfit !== null && !fits) return { kind: 'file-refused', sentence: misfit }
      fits = true
      if (filled > Math.max(width, 1)) {
        return rejected(`The row has ${filled} cells, the ${mapping.headerRows > 0 ? 'header' : 'first row'} ${width}: is a decimal comma or delimiter not quoted?`)
      }
      const outcome = readFilmRow(cells, rowLine, mapping)
      if (outcome.kind === 'rejected') return outcome
      const former = sameFilm(outcome)
      if (former !== null) return rejected(`Film number: line ${former} has the same film of this exposure already. Repeated readings of one film need a mean first.`)
      return outcome
    },
  }
}
