/**
 * What makes two headers the same: their words in their order, whatever the case and spacing. A mapping is remembered
 * under it (the server keeps its hash).
 *
 * @example
 * headerSignature([' Exposure  (s)', 'DEPTH']) === headerSignature(['exposure (s)', 'depth']) // => true
 */
export function headerSignature(header: readonly string[]): string {
  const words = header.map(cell => cell.normalize('NFC').trim().replace(/\s+/g, ' ').toLowerCase())
  let width = words.length
  while (width > 0 && words[width - 1] === '') width--
  // The separator cannot be typed into a cell that was tokenised from text.
  return words.slice(0, width).join('\u001f')
}
