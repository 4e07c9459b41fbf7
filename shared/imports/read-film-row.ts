import type { FilmImportMapping, RejectedRow } from '../contracts/film-imports.ts'
import { cellCharactersMax, looksLikeFormula, readNumberCell } from './number-cell.ts'
import { exposureOf, isTimeUnit, micrometresOf } from './scale.ts'
import { shortened } from './shortened.ts'
import { stateOf, type FilmReadingState } from './state-words.ts'
import { exposureUnitOf, lengthUnitOf, unitLabels } from './unit-words.ts'

/** A row that can be stored. Texts are as they stood in the file, with the column's unit where the cell names none. */
export interface ImportedReading {
  readonly kind: 'reading'
  readonly line: number
  /** Seconds or mJ/cm², as the study counts. */
  readonly exposure: number
  readonly exposureText: string
  readonly depthMicrometres: number | null
  readonly depthText: string
  readonly standardUncertaintyMicrometres: number | null
  readonly state: FilmReadingState
  readonly exclusionReason: string | null
  readonly note: string
  /** What the replicate column says, or null. Readings of one exposure are ordered by it. */
  readonly replicateText: string | null
  /** Things that were taken in but that a person should know: a zero thickness read as "no film", a negative thickness. */
  readonly remarks: readonly string[]
}

export type RowOutcome = ImportedReading | ({ readonly kind: 'rejected' } & RejectedRow)

/** Largest exposure, largest thickness and longest texts that a reading can hold (contract film.ts). */
const exposureMax = 1e9
const depthMicrometresMax = 100_000
const textCharactersMax = 100
const noteCharactersMax = 400
const replicateMax = 100_000

type Read<Value> = { readonly value: Value; readonly text?: string } | { readonly reason: string }

/** What stands in the file means nothing without its column's unit: 430 is a film in µm and a plank in mm. */
const withUnit = (cell: string, unitText: string, unit: keyof typeof unitLabels) => (unitText === '' ? `${cell} ${unitLabels[unit]}` : cell)

function readExposure(cell: string, mapping: FilmImportMapping): Read<number> {
  const read = readNumberCell(cell, mapping.decimalMark)
  if (read.kind === 'empty') return { reason: 'Exposure: the cell is empty.' }
  if (read.kind === 'refused') return { reason: `Exposure: the cell ${read.sentence}.` }
  const { unit: columnUnit } = mapping.exposure
  const unit = read.unitText === '' ? columnUnit : exposureUnitOf(read.unitText)
  if (unit === null || isTimeUnit(unit) !== isTimeUnit(columnUnit)) {
    return { reason: `Exposure: the cell says “${shortened(read.unitText, 40)}”, the column is in ${unitLabels[columnUnit]}.` }
  }
  const value = exposureOf(read, unit)
  if (value === 0) return { reason: 'Exposure: is zero; an exposure must be above zero.' }
  if (value < 0) return { reason: 'Exposure: is negative; an exposure must be above zero.' }
  if (value > exposureMax) return { reason: 'Exposure: is too large to be meant.' }
  return { value, text: withUnit(cell, read.unitText, unit) }
}

function readLength(cell: string, what: string, unitOfColumn: FilmImportMapping['depth']['unit'], mapping: FilmImportMapping): Read<number | null> {
  const read = readNumberCell(cell, mapping.decimalMark)
  if (read.kind === 'empty') return { value: null }
  if (read.kind === 'refused') return { reason: `${what}: the cell ${read.sentence}.` }
  const unit = read.unitText === '' ? unitOfColumn : lengthUnitOf(read.unitText)
  if (unit === null) return { reason: `${what}: the cell says “${shortened(read.unitText, 40)}”, the column is in ${unitLabels[unitOfColumn]}.` }
  const value = micrometresOf(read, unit)
  if (Math.abs(value) > depthMicrometresMax) return { reason: `${what}: is more than 100 mm, too much to be meant.` }
  return { value, text: withUnit(cell, read.unitText, unit) }
}

function readState(cell: string, depthCell: string): Read<FilmReadingState | null> {
  if (cell.trim() === '') return { value: stateOf(depthCell) }
  const state = stateOf(cell)
  if (state !== null) return { value: state }
  if (looksLikeFormula(cell)) return { reason: 'State: looks like a spreadsheet formula; formulas are never calculated here.' }
  return { reason: `State: “${shortened(cell.trim(), 40)}” is none of measured, no film, lost in wash, excluded.` }
}

function readReplicate(cell: string | null): Read<string | null> {
  const text = cell?.trim() ?? ''
  if (text === '') return { value: null }
  if (text.length > textCharactersMax) return { reason: `Film number: has more than ${textCharactersMax} characters.` }
  if (looksLikeFormula(text)) return { reason: 'Film number: looks like a spreadsheet formula; formulas are never calculated here.' }
  if (/^[+-]?\d+$/.test(text) && !(Number(text) >= 1 && Number(text) <= replicateMax)) {
    return { reason: `Film number: must be 1 to ${replicateMax}.` }
  }
  return { value: text }
}

const textOf = (read: Read<unknown>, cell: string) => ('value' in read ? (read.text ?? cell) : cell)

/** Binary rounding of the subtraction ends below a picometre. */
const withoutSubstrate = (depth: number, substrate: number) => (substrate === 0 ? depth : Math.round((depth - substrate) * 1e6) / 1e6)

/**
 * One data row as a reading, or what is wrong with it: every reason, not only the first.
 *
 * A unit written in a cell holds for that cell. A thickness of exactly 0 without a state is taken as "no film": nothing
 * formed, and a curve through a measured 0 would be pulled by a point that is not on it; the reading keeps the text and
 * says so. A negative thickness is kept and remarked, because noise around a zeroed caliper is honest data.
 *
 * @param cells - as tokenised; nothing in them is ever evaluated
 * @param line - line of the file, from 1, where the row begins
 * @example
 * readFilmRow(['1,7', '0,43 mm'], 2, { ...mapping, decimalMark: ',' }) // => { kind: 'reading', exposure: 1.7, depthMicrometres: 430, … }
 */
export function readFilmRow(cells: readonly string[], line: number, mapping: FilmImportMapping): RowOutcome {
  const reasons: string[] = []
  const remarks: string[] = []
  const cellOf = (part: { readonly column: number } | null) => (part === null ? null : (cells[part.column] ?? ''))
  const take = <Value>(read: Read<Value>): Value | null => {
    if ('value' in read) return read.value
    reasons.push(read.reason)
    return null
  }
  const huge = cells.findIndex(cell => cell.length > cellCharactersMax)
  if (huge !== -1) reasons.push(`Column ${huge + 1}: has more than ${cellCharactersMax} characters: is a quotation mark missing?`)
  if (cells.some(cell => cell.includes('\0'))) reasons.push('The row holds a zero byte, which no text file should.')
  if (reasons.length > 0) return { kind: 'rejected', line, cells: [...cells], reasons }

  const exposureCell = (cellOf(mapping.exposure) ?? '').trim()
  const depthCell = (cellOf(mapping.depth) ?? '').trim()
  const exposureRead = readExposure(exposureCell, mapping)
  const exposure = take(exposureRead)
  const namedState = take(readState(cellOf(mapping.state) ?? '', depthCell))
  const depthRead = stateOf(depthCell) !== null ? { value: null } : readLength(depthCell, 'Thickness', mapping.depth.unit, mapping)
  const typedDepth = take(depthRead)
  const exposureText = textOf(exposureRead, exposureCell)
  const depthText = textOf(depthRead, depthCell)
  const uncertaintyCell = cellOf(mapping.uncertainty)
  const uncertainty = uncertaintyCell === null || mapping.uncertainty === null ? null : take(readLength(uncertaintyCell, 'Uncertainty', mapping.uncertainty.unit, mapping))
  const replicateText = take(readReplicate(cellOf(mapping.replicate)))
  // Our own exports put an apostrophe before text that a spreadsheet would calculate; it comes off on the way back.
  let note = (cellOf(mapping.note) ?? '').trim().replace(/^'(?=[=+\-@\t\r])/, '')

  if (exposureText.length > textCharactersMax || depthText.length > textCharactersMax) reasons.push(`A number has more than ${textCharactersMax} characters.`)
  if (note.length > noteCharactersMax) reasons.push(`Note: has more than ${noteCharactersMax} characters.`)
  if (uncertainty !== null && uncertainty <= 0) reasons.push('Uncertainty: must be above zero; leave it empty where it is not known.')

  const depthFailed = reasons.some(reason => reason.startsWith('Thickness'))
  const state = namedState ?? (typedDepth === 0 ? 'no-film' : 'measured')
  if (namedState === null && typedDepth === 0) {
    remarks.push('A thickness of 0 is taken as “no film”.')
    if (note === '') note = 'Thickness 0 in the file, taken as no film.'
  }
  if (state === 'measured' && typedDepth === 0) reasons.push('Thickness: is 0, but the state says measured; a film that did not form is “no film”.')
  if (state === 'measured' && typedDepth === null && !depthFailed) reasons.push('Thickness: the cell is empty; write the thickness, or a state such as “no film”.')
  if (state === 'no-film' && typedDepth !== null && typedDepth !== 0) reasons.push('Thickness: there is one, but the state says no film.')
  if (exposure === null || reasons.length > 0) return { kind: 'rejected', line, cells: [...cells], reasons }

  const depth = typedDepth === null || state === 'no-film' ? null : withoutSubstrate(typedDepth, mapping.substrateThicknessMicrometres)
  if (depth !== null && depth < -depthMicrometresMax) return { kind: 'rejected', line, cells: [...cells], reasons: ['Thickness: less than the substrate by more than 100 mm.'] }
  if (depth !== null && depth < 0) remarks.push('The thickness is negative: check the zero of the caliper and the substrate.')
  return {
    kind: 'reading',
    line,
    exposure,
    exposureText,
    depthMicrometres: depth,
    depthText,
    standardUncertaintyMicrometres: uncertainty,
    state,
    exclusionReason: state === 'excluded' ? (note === '' ? 'Excluded in the imported file.' : note) : null,
    note,
    replicateText,
    remarks,
  }
}
