import type { z } from 'zod'
import type { FilmImportMapping } from '../contracts/film-imports.ts'
import type { exposureKindSchema } from '../contracts/studies.ts'
import { detectDecimalMark } from './detect-decimal-mark.ts'
import type { Delimiter } from './detect-delimiter.ts'
import type { TextEncoding } from './detect-encoding.ts'
import { guessHeaderRows } from './guess-header-rows.ts'
import { exposureUnitOfHeader, lengthUnitOfHeader, roleOfHeader, type ColumnRole } from './header-words.ts'
import { readNumberCell } from './number-cell.ts'

export type ExposureKind = z.infer<typeof exposureKindSchema>

export interface MappingGuess {
  /** What a person is asked to confirm; null where the file has fewer than two columns. */
  readonly mapping: FilmImportMapping | null
  /** The header's words for each column: all header rows joined. */
  readonly header: readonly string[]
  /** What rests on a guess rather than on a word in the header: these the screen points at. */
  readonly unsure: readonly ('exposure-column' | 'depth-column' | 'exposure-unit' | 'depth-unit')[]
  /** Plain sentences about the file, such as two columns of one name. */
  readonly remarks: readonly string[]
}

/** The cells of the header, one text per column; several header rows are joined (names above, units below). */
export function headerOf(rows: readonly (readonly string[])[], headerRows: number): readonly string[] {
  const named = rows.slice(0, headerRows).slice(-3)
  const width = Math.min(500, Math.max(0, ...named.map(row => row.length)))
  // A line such as "Operator: …" above the names is narrower than the table.
  const wide = named.filter(row => row.filter(cell => cell.trim() !== '').length >= Math.min(2, width))
  return Array.from({ length: width }, (_, i) => wide.map(row => (row[i] ?? '').trim()).filter(cell => cell !== '').join(' '))
}

/** Columns most of whose filled cells are numbers, left to right. */
function numericColumns(data: readonly (readonly string[])[], decimalMark: FilmImportMapping['decimalMark']): readonly number[] {
  const width = Math.min(500, Math.max(0, ...data.map(row => row.length)))
  return Array.from({ length: width }, (_, i) => i).filter(i => {
    const cells = data.map(row => readNumberCell(row[i] ?? '', decimalMark)).filter(cell => cell.kind !== 'empty')
    return cells.length > 0 && cells.filter(cell => cell.kind === 'number').length * 2 > cells.length
  })
}

/** Cured films are 0.05 to 2 mm thick: a typical value below 10 was written in mm, one above in µm. */
function depthUnitBySize(data: readonly (readonly string[])[], column: number, decimalMark: FilmImportMapping['decimalMark']) {
  const values = data
    .map(row => readNumberCell(row[column] ?? '', decimalMark))
    .flatMap(cell => (cell.kind === 'number' ? [Math.abs(Number(`${cell.mantissa}e${cell.exponent}`))] : []))
    .sort((a, b) => a - b)
  const middle = values[Math.floor(values.length / 2)]
  return middle !== undefined && middle >= 10 ? 'um' : 'mm'
}

/**
 * Guesses what the columns of a file mean, from the words and units in its header and from its numbers. A person
 * confirms the guess before anything is imported.
 *
 * @param sample.rows - the first rows of the file (a few hundred), tokenised with the detected delimiter
 * @param exposureKind - how the study counts exposure: the unit where the header names none
 * @example
 * guessFilmImportMapping({ rows: [['t (s)', 'depth (mm)'], ['1.7', '0.43']], encoding: 'utf-8', delimiter: ',' }, 'seconds')
 */
export function guessFilmImportMapping(
  sample: { readonly rows: readonly (readonly string[])[]; readonly encoding: TextEncoding; readonly delimiter: Delimiter },
  exposureKind: ExposureKind,
): MappingGuess {
  const decimalMark = detectDecimalMark(sample.rows)
  const headerRows = guessHeaderRows(sample.rows, decimalMark)
  const header = headerOf(sample.rows, headerRows)
  const data = sample.rows.slice(headerRows)
  const remarks: string[] = []
  const seen = new Set<string>()
  for (const name of header.map(cell => cell.toLowerCase())) {
    if (name !== '' && seen.has(name)) remarks.push(`Two columns are called “${name}”: check which one is meant.`)
    seen.add(name)
  }

  const byRole = new Map<ColumnRole, number>()
  header.forEach((cell, i) => {
    const role = roleOfHeader(cell)
    if (role !== null && !byRole.has(role)) byRole.set(role, i)
  })
  const taken = new Set(byRole.values())
  const free = numericColumns(data, decimalMark).filter(column => !taken.has(column))
  const exposureColumn = byRole.get('exposure') ?? free.shift()
  const depthColumn = byRole.get('depth') ?? free.shift()
  if (exposureColumn === undefined || depthColumn === undefined) {
    return { mapping: null, header, unsure: ['exposure-column', 'depth-column'], remarks: [...remarks, 'No two columns of numbers were found: is the delimiter right?'] }
  }

  const exposureUnit = exposureUnitOfHeader(header[exposureColumn] ?? '')
  const depthUnit = lengthUnitOfHeader(header[depthColumn] ?? '')
  const uncertaintyColumn = byRole.get('uncertainty')
  const usedDepthUnit = depthUnit ?? depthUnitBySize(data, depthColumn, decimalMark)
  const column = (role: ColumnRole) => {
    const found = byRole.get(role)
    return found === undefined ? null : { column: found }
  }
  return {
    mapping: {
      encoding: sample.encoding,
      delimiter: sample.delimiter,
      decimalMark,
      headerRows,
      exposure: { column: exposureColumn, unit: exposureUnit ?? (exposureKind === 'seconds' ? 's' : 'mJ/cm2') },
      depth: { column: depthColumn, unit: usedDepthUnit },
      state: column('state'),
      uncertainty: uncertaintyColumn === undefined ? null : { column: uncertaintyColumn, unit: lengthUnitOfHeader(header[uncertaintyColumn] ?? '') ?? usedDepthUnit },
      replicate: column('replicate'),
      note: column('note'),
      substrateThicknessMicrometres: 0,
    },
    header,
    unsure: [
      ...(byRole.has('exposure') ? [] : ['exposure-column' as const]),
      ...(byRole.has('depth') ? [] : ['depth-column' as const]),
      ...(exposureUnit === null ? ['exposure-unit' as const] : []),
      ...(depthUnit === null ? ['depth-unit' as const] : []),
    ],
    remarks,
  }
}
