import { exposureUnitOf, lengthUnitOf, type ExposureUnit, type LengthUnit } from './unit-words.ts'

export type ColumnRole = 'exposure' | 'depth' | 'state' | 'uncertainty' | 'replicate' | 'note'

/** Beginnings of words in headers: ours in English, the same in a few European languages. */
const beginnings: Readonly<Record<ColumnRole, readonly string[]>> = {
  exposure: ['expos', 'time', 'dose', 'energ', 'énerg', 'belicht', 'zeit', 'dosis', 'temps', 'tiempo', 'tempo', 'espos', 'tijd', 'durée', 'seconds', 'radiant'],
  depth: ['depth', 'thick', 'dicke', 'tiefe', 'schichtdicke', 'filmdicke', 'épaiss', 'epaiss', 'profond', 'espesor', 'grosor', 'profund', 'spessor', 'dikte', 'diepte', 'cured'],
  uncertainty: ['uncert', 'sd', 'stdev', 'sigma', 'unsicher', 'incert', 'onzeker', 'repeatab', 'stderr'],
  state: ['state', 'status', 'zustand', 'statut', 'état', 'estado', 'stato', 'toestand', 'formed'],
  replicate: ['replic', 'repeat', 'film', 'sample', 'specimen', 'probe', 'muster', 'échant', 'muestra', 'campione', 'wiederhol', 'répét', 'nr', 'no'],
  note: ['note', 'remark', 'comment', 'bemerk', 'kommentar', 'remarque', 'commentaire', 'nota', 'observ', 'opmerking', 'anmerk', 'reason'],
}
/** Whole headers that are too short to be matched by their beginning. */
const wholeHeaders: Readonly<Record<string, ColumnRole>> = { t: 'exposure', e: 'exposure', cd: 'depth', d: 'depth', u: 'uncertainty', '#': 'replicate' }

/** "Depth uncertainty" is an uncertainty, "film thickness" a depth: the first role of this list that matches. */
const precedence: readonly ColumnRole[] = ['uncertainty', 'note', 'state', 'depth', 'exposure', 'replicate']

/** No header that a person wrote is longer; a lost quotation mark makes one of a whole file. */
const headerCharactersMax = 200

/** What a header cell says its column is, or null. @example roleOfHeader('Belichtungszeit [s]') // => 'exposure' */
export function roleOfHeader(header: string): ColumnRole | null {
  const plain = header.slice(0, headerCharactersMax).normalize('NFC').toLowerCase().replace(/[([].*$/, '').trim()
  const whole = wholeHeaders[plain]
  if (whole !== undefined) return whole
  const words = plain.split(/[^\p{L}\d]+/u).filter(word => word !== '')
  for (const role of precedence) {
    const short = (beginning: string) => beginning.length <= 2
    if (words.some(word => beginnings[role].some(b => (short(b) ? word === b : word.startsWith(b))))) return role
  }
  // German joins words: Schichtdicke, Aushärtetiefe.
  if (/(?:dicke|tiefe)$/.test(plain)) return 'depth'
  if (/zeit$/.test(plain)) return 'exposure'
  return null
}

/** The pieces of a header that may be a unit: what stands in brackets, after "in" or a comma, or at its end. */
function unitCandidates(whole: string): readonly string[] {
  const header = whole.slice(0, headerCharactersMax)
  const bracketed = [...header.matchAll(/[([]([^)\]]*)[)\]]/g)].map(match => match[1] ?? '')
  const words = header.split(/[\s_,]+/).filter(word => word !== '')
  const tails = [1, 2, 3, 4].filter(n => n < words.length).map(n => words.slice(-n).join(' '))
  return [...bracketed, ...tails]
}

const firstOf = <Unit>(header: string, find: (text: string) => Unit | null): Unit | null => {
  for (const candidate of unitCandidates(header)) {
    const unit = find(candidate)
    if (unit !== null) return unit
  }
  return null
}

/** The exposure unit a header names, or null. @example exposureUnitOfHeader('dose_mj_per_cm2') // => 'mJ/cm2' */
export const exposureUnitOfHeader = (header: string): ExposureUnit | null => firstOf(header, exposureUnitOf)

/** The length unit a header names, or null. @example lengthUnitOfHeader('Dicke in mm') // => 'mm' */
export const lengthUnitOfHeader = (header: string): LengthUnit | null => firstOf(header, lengthUnitOf)
