/**
 * Turns every kind of line end (CR LF, CR, LF, also mixed) into LF, chunk by chunk, so that the tokeniser needs to know
 * one only. A CR at the end of a chunk is held back until the next one says whether an LF follows.
 *
 * @example
 * const lines = createLineEndNormaliser()
 * lines.next('a\r') + lines.next('\nb\rc') + lines.end() // => 'a\nb\nc'
 */
export function createLineEndNormaliser(): { next(chunk: string): string; end(): string } {
  let heldBack = false
  return {
    next(chunk) {
      if (chunk === '') return ''
      let text = heldBack ? `\r${chunk}` : chunk
      heldBack = text.endsWith('\r')
      if (heldBack) text = text.slice(0, -1)
      return text.includes('\r') ? text.replace(/\r\n?/g, '\n') : text
    },
    end() {
      const last = heldBack ? '\n' : ''
      heldBack = false
      return last
    },
  }
}
