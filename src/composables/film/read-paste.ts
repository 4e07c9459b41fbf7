import { exposureUnitOfHeader, lengthUnitOfHeader, roleOfHeader } from '#shared/imports/index.ts'
import { parseExposure, type ExposureUnit, type LengthUnit } from '#shared/units.ts'
import type { CellPlace } from './film-cells.ts'

export interface PastedCell extends CellPlace {
  readonly exposureText: string
  readonly text: string
}

export interface PasteOutcome {
  readonly cells: readonly PastedCell[]
  /** Unit that the pasted header names for thicknesses. */
  readonly depthUnit: LengthUnit | null
  /** What was left out, as sentences. */
  readonly remarks: readonly string[]
}

/** Rows and columns as spreadsheets put them on the clipboard: tabs between cells, quotes around line ends. */
export function blockOf(text: string): readonly (readonly string[])[] {
  const rows: string[][] = [[]]
  let cell = ''
  let quoted = false
  const plain = text.replace(/\r\n?/g, '\n').replace(/\n$/, '')
  for (let i = 0; i < plain.length; i++) {
    const character = plain[i] ?? ''
    if (quoted) {
      if (character === '"' && plain[i + 1] === '"') {
        cell += '"'
        i++
      } else if (character === '"') quoted = false
      else cell += character
    } else if (character === '"' && cell === '') quoted = true
    else if (character === '\t' || character === '\n') {
      rows.at(-1)?.push(cell)
      cell = ''
      if (character === '\n') rows.push([])
    } else cell += character
  }
  rows.at(-1)?.push(cell)
  return rows.map(row => row.map(value => value.trim())).filter(row => row.some(value => value !== ''))
}

const numberLike = (text: string) => /\d/.test(text) && !/^[a-z]{3,}/i.test(text)

/**
 * Places a pasted block on the grid.
 *
 * With an exposure column (pasted onto the exposures, or named by the header) the first column names the rows, and rows
 * that are not there yet are added. Without one the block fills cells to the right of and below the cell it was pasted on.
 *
 * @param at.exposure - row of the cell that was pasted on; null for the exposure column
 */
export function readPaste(
  text: string,
  at: { readonly exposure: number | null; readonly replicate: number },
  grid: { readonly exposures: readonly number[]; readonly exposureTexts: ReadonlyMap<number, string>; readonly exposureKind: 'seconds' | 'mJ/cm2' },
): PasteOutcome {
  const block = blockOf(text)
  const remarks: string[] = []
  const [first = []] = block
  const hasHeader = block.length > 1 && !first.some(numberLike)
    || first.some(cell => roleOfHeader(cell) !== null && !/^[\d.,+-]/.test(cell))
  const rows = hasHeader ? block.slice(1) : block
  const namedExposure = hasHeader && roleOfHeader(first[0] ?? '') === 'exposure'
  const depthUnit = hasHeader ? first.slice(namedExposure ? 1 : 0).map(lengthUnitOfHeader).find(unit => unit !== null) ?? null : null
  if (at.exposure !== null && !namedExposure) return { ...placedBelow(rows, { ...at, exposure: at.exposure }, grid, remarks), depthUnit }

  const unit: ExposureUnit | null = hasHeader ? exposureUnitOfHeader(first[0] ?? '') : null
  const cells: PastedCell[] = []
  const used = new Map<number, number>()
  rows.forEach((row, i) => {
    const [head = '', ...rest] = row
    const parsed = parseExposure(head, { exposureKind: grid.exposureKind, ...(unit === null ? {} : { defaultUnit: unit }) })
    if (parsed.kind === 'refused') {
      remarks.push(`Row ${i + 1 + (hasHeader ? 1 : 0)} was left out: ${parsed.detail}`)
      return
    }
    // An exposure that comes again brings further films of it, never a second value for the first.
    const before = used.get(parsed.value) ?? 0
    used.set(parsed.value, before + rest.length)
    rest.forEach((value, column) => {
      if (value !== '') cells.push({ exposure: parsed.value, exposureText: parsed.text, replicate: before + column + 1, text: value })
    })
    if (rest.every(value => value === '')) cells.push({ exposure: parsed.value, exposureText: parsed.text, replicate: before + 1, text: '' })
  })
  return { cells, depthUnit, remarks }
}

function placedBelow(
  rows: readonly (readonly string[])[],
  at: CellPlace,
  grid: { readonly exposures: readonly number[]; readonly exposureTexts: ReadonlyMap<number, string> },
  remarks: string[],
): Omit<PasteOutcome, 'depthUnit'> {
  const start = grid.exposures.indexOf(at.exposure)
  const cells: PastedCell[] = []
  rows.forEach((row, i) => {
    const exposure = grid.exposures[start + i]
    if (exposure === undefined) return
    row.forEach((text, column) => {
      if (text !== '') cells.push({ exposure, exposureText: grid.exposureTexts.get(exposure) ?? String(exposure), replicate: at.replicate + column, text })
    })
  })
  const beyond = Math.max(0, start + rows.length - grid.exposures.length)
  if (beyond > 0) remarks.push(`${beyond} pasted ${beyond === 1 ? 'row reaches' : 'rows reach'} below the last exposure and ${beyond === 1 ? 'was' : 'were'} left out: add exposures first, or paste with the exposure column.`)
  return { cells, remarks }
}
