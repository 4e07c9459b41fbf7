import { stateOf } from '#shared/imports/index.ts'
import { parseLength, type LengthUnit } from '#shared/units.ts'
import type { FilmReadingSave } from '#shared/contracts/film.ts'

/** What a text typed into a cell means. */
export type TypedCell =
  | { readonly kind: 'empty' }
  | { readonly kind: 'state'; readonly state: 'no-film' | 'lost-in-wash' }
  | { readonly kind: 'depth'; readonly depthMicrometres: number; readonly depthText: string }
  | { readonly kind: 'unreadable'; readonly text: string; readonly sentence: string }

const unitNames: Readonly<Record<LengthUnit, string>> = { um: 'µm', mm: 'mm', mil: 'mil', in: 'in' }
/** As the database holds it. */
const textCharactersMax = 100

/**
 * Reads what a person or a caliper typed into a film cell. The substrate is subtracted; the text is kept with its unit.
 *
 * @example
 * readTypedCell('0.085', { entryUnit: 'mm', substrateThicknessMicrometres: 0 }) // => 85 µm, kept as "0.085 mm"
 * readTypedCell('no film', settings) // => { kind: 'state', state: 'no-film' }
 */
export function readTypedCell(text: string, settings: { readonly entryUnit: LengthUnit; readonly substrateThicknessMicrometres: number }): TypedCell {
  const trimmed = text.trim()
  if (trimmed === '' || trimmed === '-' || trimmed === '—') return { kind: 'empty' }
  const state = stateOf(trimmed)
  if (state === 'no-film' || state === 'lost-in-wash') return { kind: 'state', state }
  const parsed = parseLength(trimmed, { defaultUnit: settings.entryUnit })
  if (parsed.kind === 'refused') return { kind: 'unreadable', text: trimmed.slice(0, textCharactersMax), sentence: parsed.detail }
  const typedUnit = /[^\d.,\s+\-−–‒'’e]/i.test(parsed.text)
  return {
    kind: 'depth',
    // Subtraction in binary leaves tails such as 84.99999999999999.
    depthMicrometres: Number((parsed.value - settings.substrateThicknessMicrometres).toPrecision(12)),
    depthText: (typedUnit ? parsed.text : `${parsed.text} ${unitNames[parsed.unit]}`).slice(0, textCharactersMax),
  }
}

/** A cell's content from what was typed; null leaves the place empty. */
export function contentFromTyped(
  typed: TypedCell,
  place: { readonly exposure: number; readonly exposureText: string; readonly replicate: number },
  former: Pick<FilmReadingSave, 'note' | 'state' | 'exclusionReason' | 'standardUncertaintyMicrometres'> | null,
) {
  const base = { ...place, standardUncertaintyMicrometres: former?.standardUncertaintyMicrometres ?? null, exclusionReason: null, note: former?.note ?? '', withdrawn: false }
  switch (typed.kind) {
    case 'empty':
      return null
    case 'state':
      return { ...base, depthMicrometres: null, depthText: '', state: typed.state }
    case 'depth':
      // A new number for an excluded film does not bring it back by itself.
      return former?.state === 'excluded'
        ? { ...base, depthMicrometres: typed.depthMicrometres, depthText: typed.depthText, state: 'excluded' as const, exclusionReason: former.exclusionReason }
        : { ...base, depthMicrometres: typed.depthMicrometres, depthText: typed.depthText, state: 'measured' as const }
    case 'unreadable':
      return { ...base, depthMicrometres: null, depthText: typed.text, state: 'measured' as const }
  }
}
