import { AppError } from '../errors.ts'

/** A value that only the rest of the shop shows to be wrong, named at its field. */
export function refusedField(field: string, detail: string): AppError {
  return new AppError('validation-failed', { detail, fields: [{ path: `body.${field}`, sentence: detail }] })
}

/**
 * Something new rests on things of this shop that are in use. What another shop owns is to the caller what does not exist.
 *
 * @param word - the kind of thing; its field in the body is the word with `Id`
 */
export function checkInUse<T extends { readonly retiredAt: string | null }>(thing: T | null, word: string): T {
  if (thing === null) throw refusedField(`${word}Id`, `There is no such ${word} in this shop.`)
  if (thing.retiredAt !== null) throw refusedField(`${word}Id`, `This ${word} is retired. Restore it first, or choose another.`)
  return thing
}
