import type { FilmImportMapping } from '../contracts/film-imports.ts'

export type Delimiter = FilmImportMapping['delimiter']

/** In this order: a file with semicolons may be full of decimal commas, never the other way round. */
const candidates: readonly Delimiter[] = ['\t', ';', '|', ',']

/** Delimiters in each line, outside quotes; a quoted line end does not end the line. */
function countsPerLine(text: string, delimiter: string, linesMax: number): readonly number[] {
  const counts: number[] = []
  let count = 0
  let quoted = false
  let blank = true
  for (const character of text) {
    if (character === '"') quoted = !quoted
    if (quoted) continue
    if (character === '\n' || character === '\r') {
      if (!blank) counts.push(count)
      if (counts.length === linesMax) return counts
      count = 0
      blank = true
    } else {
      if (character === delimiter) count++
      blank = false
    }
  }
  if (!blank) counts.push(count)
  return counts
}

/**
 * The character between the cells of a CSV file: the candidate that splits most lines into the same number (two or
 * more) of cells. A comma where nothing splits.
 *
 * @param text - the beginning of the file, decoded
 * @example
 * detectDelimiter('t;d\n1,7;0,43\n2,1;0,51') // => ';'
 */
export function detectDelimiter(text: string): Delimiter {
  let best: { delimiter: Delimiter; share: number } = { delimiter: ',', share: 0 }
  for (const delimiter of candidates) {
    const counts = countsPerLine(text, delimiter, 100)
    const sizes = new Map<number, number>()
    for (const count of counts) {
      if (count > 0) sizes.set(count, (sizes.get(count) ?? 0) + 1)
    }
    const share = counts.length === 0 ? 0 : Math.max(0, ...sizes.values()) / counts.length
    // Ahead by a clear margin only: decimal commas split lines nearly as evenly as the true delimiter does.
    if (share > best.share + 0.1) best = { delimiter, share }
  }
  return best.delimiter
}
