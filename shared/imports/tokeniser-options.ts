import type { FilmImportMapping } from '../contracts/film-imports.ts'

/**
 * How browser and server tokenise alike: what both hand to the CSV parser. Blank rows are kept so that line numbers are
 * right, nothing is converted, and line ends are LF because `createLineEndNormaliser` ran before.
 */
export function csvTokeniserOptions(delimiter: FilmImportMapping['delimiter']) {
  return { delimiter, newline: '\n', quoteChar: '"', escapeChar: '"', header: false, dynamicTyping: false, skipEmptyLines: false } as const
}

/** A row longer than this is an unclosed quotation mark swallowing the file: 500 cells of 1000 characters and their quotes. */
export const rowCharactersMax = 1_000_000
