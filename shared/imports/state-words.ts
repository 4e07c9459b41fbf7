import type { z } from 'zod'
import type { filmReadingStateSchema } from '../contracts/film.ts'

export type FilmReadingState = z.infer<typeof filmReadingStateSchema>

const words: readonly (readonly [FilmReadingState, readonly string[]])[] = [
  ['measured', ['measured', 'ok', 'good', 'yes', 'valid', 'gemessen', 'gültig', 'mesuré', 'mesurée', 'valide', 'medido', 'medida', 'misurato', 'misurata', 'gemeten']],
  ['no-film', ['no film', 'nofilm', 'not formed', 'did not form', 'nothing', 'kein film', 'nicht gebildet', 'pas de film', 'aucun film', 'sin película', 'sin pelicula', 'nessun film', 'geen film']],
  ['lost-in-wash', ['lost in wash', 'lost', 'washed away', 'verloren', 'weggewaschen', 'perdu', 'perdue', 'perdido', 'perdida', 'perso', 'persa']],
  ['excluded', ['excluded', 'exclude', 'ausgeschlossen', 'exclu', 'exclue', 'excluido', 'excluida', 'escluso', 'esclusa', 'uitgesloten']],
]

/** The reading's state that a word names, or null. @example stateOf('No film') // => 'no-film' */
export function stateOf(text: string): FilmReadingState | null {
  const plain = text.normalize('NFC').trim().toLowerCase().replace(/[-_\s]+/g, ' ')
  return words.find(([, spellings]) => spellings.includes(plain))?.[0] ?? null
}
