import type { z } from 'zod'
import type { exposureUnitSchema, lengthUnitSchema } from '../contracts/film-imports.ts'

export type ExposureUnit = z.infer<typeof exposureUnitSchema>
export type LengthUnit = z.infer<typeof lengthUnitSchema>

const exposureWords: readonly (readonly [ExposureUnit, readonly string[]])[] = [
  ['s', ['s', 'sec', 'secs', 'second', 'seconds', 'sek', 'sekunde', 'sekunden', 'seconde', 'secondes', 'seg', 'segundo', 'segundos', 'secondo', 'secondi', 'seconden']],
  ['ms', ['ms', 'msec', 'millisecond', 'milliseconds', 'millisekunde', 'millisekunden', 'milliseconde', 'millisecondes', 'milisegundos', 'millisecondi']],
  ['mJ/cm2', ['mj/cm2', 'mjcm-2', 'mjpercm2', 'mj/cmsq', 'mj/sqcm']],
  ['J/m2', ['j/m2', 'jm-2', 'jperm2', 'j/msq', 'j/sqm']],
]
const lengthWords: readonly (readonly [LengthUnit, readonly string[]])[] = [
  ['um', ['um', 'micron', 'microns', 'micrometre', 'micrometres', 'micrometer', 'micrometers', 'mikrometer', 'mikron', 'micromètre', 'micromètres', 'micrómetros', 'micrometri']],
  ['mm', ['mm', 'millimetre', 'millimetres', 'millimeter', 'millimeters', 'millimètre', 'millimètres', 'milímetros', 'millimetri']],
  ['mil', ['mil', 'mils', 'thou']],
  ['in', ['in', 'inch', 'inches', '"', '″', 'zoll', 'pouce', 'pouces', 'pulgadas', 'pollici']],
]

/** One spelling for the many ways to write a unit: "mJ·cm⁻²", "mJ / cm^2" and "mj_per_cm2" are the same. */
function plainUnit(text: string): string {
  return text
    .normalize('NFKC')
    .toLowerCase()
    .replace(/[µμ]/g, 'u')
    .replace(/[\s_^*·⋅()[\].]/g, '')
    .replace(/[−–]/g, '-')
}

const find = <Unit>(words: readonly (readonly [Unit, readonly string[]])[], text: string): Unit | null => {
  const plain = plainUnit(text)
  return words.find(([, spellings]) => spellings.includes(plain))?.[0] ?? null
}

/** The exposure unit that a text names, or null. @example exposureUnitOf('mJ/cm²') // => 'mJ/cm2' */
export const exposureUnitOf = (text: string): ExposureUnit | null => find(exposureWords, text)

/** The length unit that a text names, or null. @example lengthUnitOf('µm') // => 'um' */
export const lengthUnitOf = (text: string): LengthUnit | null => find(lengthWords, text)

/** How a unit is written on screen. */
export const unitLabels: Readonly<Record<ExposureUnit | LengthUnit, string>> = {
  s: 's', ms: 'ms', 'mJ/cm2': 'mJ/cm²', 'J/m2': 'J/m²', um: 'µm', mm: 'mm', mil: 'mil', in: 'in',
}
