/**
 * The beginning of a text, for a sentence or a stored copy: never ends in half of a character that takes two code units,
 * which JSON columns refuse.
 *
 * @example
 * shortened('abcdef', 3) // => 'abc…'
 */
export function shortened(text: string, charactersMax: number): string {
  if (text.length <= charactersMax) return text
  return `${text.slice(0, charactersMax).replace(/[\uD800-\uDBFF]$/, '')}…`
}
