import { createLineEndNormaliser } from './line-ends.ts'
import { rowCharactersMax } from './tokeniser-options.ts'

/** What became of the quotation marks of a row: a damaged row ran on because one did not pair up. */
export type QuoteState = 'paired' | 'damaged' | 'unclosed'

export interface TokenisedRow {
  readonly cells: readonly string[]
  readonly quotes: QuoteState
}

/**
 * What a CSV parser answers for a piece of text: its whole rows, the numbers of rows whose quotes are malformed or not
 * closed, and how many characters it used up. With `last` false it leaves the row that the text ends in for next time.
 */
export type Tokeniser = (
  text: string,
  options: { readonly last: boolean },
) => { readonly rows: readonly (readonly string[])[]; readonly damaged: ReadonlySet<number>; readonly unclosed: ReadonlySet<number>; readonly consumed: number }

export type SplitterOutcome =
  | { readonly kind: 'rows'; readonly rows: readonly TokenisedRow[] }
  /** A row that never ends: a quotation mark is open and swallows the file. */
  | { readonly kind: 'endless-row' }

/**
 * Feeds decoded text to a CSV parser piece by piece and gives whole rows back, without ever holding more than one row
 * and one piece.
 *
 * @example
 * const splitter = createRowSplitter(tokenise)
 * splitter.next('a,b\n1,') // => rows: [['a', 'b']]
 * splitter.end() // => rows: [['1', '']]
 */
export function createRowSplitter(tokenise: Tokeniser): { next(chunk: string): SplitterOutcome; end(): SplitterOutcome } {
  const lines = createLineEndNormaliser()
  let rest = ''
  const take = (last: boolean): SplitterOutcome => {
    const { rows, damaged, unclosed, consumed } = tokenise(rest, { last })
    rest = last ? '' : rest.slice(consumed)
    if (rest.length > rowCharactersMax) return { kind: 'endless-row' }
    return {
      kind: 'rows',
      rows: rows.map((cells, i) => ({ cells, quotes: unclosed.has(i) ? 'unclosed' : damaged.has(i) ? 'damaged' : 'paired' })),
    }
  }
  return {
    next(chunk) {
      rest += lines.next(chunk)
      return take(false)
    },
    end() {
      rest += lines.end()
      // A last line end closes the last row; it does not begin another.
      return rest === '' ? { kind: 'rows', rows: [] } : take(true)
    },
  }
}

interface ParserAnswer {
  readonly data: readonly (readonly string[])[]
  readonly errors: readonly { readonly type: string; readonly code: string; readonly row?: number }[]
  readonly meta: { readonly cursor: number }
}

/**
 * Makes a tokeniser of papaparse's `Parser`, which both sides hand in: browser and server split a file into the same cells.
 *
 * @example
 * tokeniserOf(new Papa.Parser(csvTokeniserOptions(';')))
 */
export function tokeniserOf(parser: { parse(input: string, baseIndex: number, ignoreLastRow: boolean): ParserAnswer }): Tokeniser {
  return (text, { last }) => {
    const answer = parser.parse(text, 0, !last)
    const rowsWith = (code: string) => new Set(answer.errors.filter(error => error.code === code).map(error => error.row ?? -1))
    return { rows: answer.data, damaged: rowsWith('InvalidQuotes'), unclosed: rowsWith('MissingQuotes'), consumed: answer.meta.cursor }
  }
}
