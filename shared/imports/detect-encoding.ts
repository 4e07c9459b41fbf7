import type { FilmImportMapping } from '../contracts/film-imports.ts'

export type TextEncoding = FilmImportMapping['encoding']

export type EncodingOutcome =
  | { readonly kind: 'text'; readonly encoding: TextEncoding; readonly byteOrderMark: boolean }
  | {
      readonly kind: 'refused'
      readonly reason: 'empty-file' | 'compressed' | 'spreadsheet' | 'other-document' | 'binary'
      readonly detail: string
    }

const saveAsCsv = 'Open it where it was made, save the sheet as CSV, and choose that file.'

/** First bytes of files that people take for CSV. */
const signatures = [
  { bytes: [0x50, 0x4b, 0x03, 0x04], reason: 'spreadsheet', detail: `This is a spreadsheet or a zip archive, not CSV. ${saveAsCsv}` },
  { bytes: [0x50, 0x4b, 0x05, 0x06], reason: 'spreadsheet', detail: `This is an empty zip archive, not CSV. ${saveAsCsv}` },
  { bytes: [0xd0, 0xcf, 0x11, 0xe0], reason: 'spreadsheet', detail: `This is a spreadsheet of an old format, not CSV. ${saveAsCsv}` },
  { bytes: [0x1f, 0x8b], reason: 'compressed', detail: 'This file is compressed (gzip). Unpack it and choose the CSV file inside.' },
  { bytes: [0x42, 0x5a, 0x68], reason: 'compressed', detail: 'This file is compressed (bzip2). Unpack it and choose the CSV file inside.' },
  { bytes: [0xfd, 0x37, 0x7a, 0x58], reason: 'compressed', detail: 'This file is compressed (xz). Unpack it and choose the CSV file inside.' },
  { bytes: [0x28, 0xb5, 0x2f, 0xfd], reason: 'compressed', detail: 'This file is compressed (zstd). Unpack it and choose the CSV file inside.' },
  { bytes: [0x25, 0x50, 0x44, 0x46], reason: 'other-document', detail: `This is a PDF document, not CSV. ${saveAsCsv}` },
  { bytes: [0x89, 0x50, 0x4e, 0x47], reason: 'other-document', detail: 'This is a picture, not CSV.' },
  { bytes: [0xff, 0xd8, 0xff], reason: 'other-document', detail: 'This is a picture, not CSV.' },
] as const

const startsWith = (head: Uint8Array, bytes: readonly number[]) =>
  head.length >= bytes.length && bytes.every((byte, i) => head[i] === byte)

/** Whether the bytes are UTF-8; a character cut off by the end of the sample does not count against it. */
function isUtf8(head: Uint8Array): boolean {
  let i = 0
  while (i < head.length) {
    const first = head[i] ?? 0
    const following = first < 0x80 ? 0 : first >= 0xc2 && first <= 0xdf ? 1 : first >= 0xe0 && first <= 0xef ? 2 : first >= 0xf0 && first <= 0xf4 ? 3 : -1
    if (following < 0) return false
    for (let k = 1; k <= following; k++) {
      const next = head[i + k]
      if (next === undefined) return true
      if ((next & 0xc0) !== 0x80) return false
    }
    i += following + 1
  }
  return true
}

/** Shares of zero bytes at even and odd places: Latin text in UTF-16 has its zeros in every other place. */
function zeroShares(head: Uint8Array): { even: number; odd: number } {
  let even = 0
  let odd = 0
  head.forEach((byte, i) => {
    if (byte === 0) {
      if (i % 2 === 0) even++
      else odd++
    }
  })
  const half = Math.max(1, Math.floor(head.length / 2))
  return { even: even / half, odd: odd / half }
}

/** Control characters that no text file holds. Tab, line ends, form feed and the old end-of-file mark are fine. */
const isOddControl = (byte: number) => byte < 0x20 && ![0x09, 0x0a, 0x0c, 0x0d, 0x1a].includes(byte)

/**
 * Finds the character encoding of a file from its beginning, or says what the file is if it is no text.
 *
 * A byte order mark decides; then UTF-16 by where its zero bytes lie; then UTF-8 if the bytes are valid UTF-8;
 * else windows-1252, which takes every byte.
 *
 * @param head - the first bytes of the file; 64 kB are plenty
 * @example
 * detectEncoding(new Uint8Array([0xef, 0xbb, 0xbf, 0x61])) // => { kind: 'text', encoding: 'utf-8', byteOrderMark: true }
 */
export function detectEncoding(head: Uint8Array): EncodingOutcome {
  if (head.length === 0) return { kind: 'refused', reason: 'empty-file', detail: 'The file is empty.' }
  for (const signature of signatures) {
    if (startsWith(head, signature.bytes)) return { kind: 'refused', reason: signature.reason, detail: signature.detail }
  }
  if (startsWith(head, [0xef, 0xbb, 0xbf])) return { kind: 'text', encoding: 'utf-8', byteOrderMark: true }
  if (startsWith(head, [0xff, 0xfe])) return { kind: 'text', encoding: 'utf-16le', byteOrderMark: true }
  if (startsWith(head, [0xfe, 0xff])) return { kind: 'text', encoding: 'utf-16be', byteOrderMark: true }
  const zeros = zeroShares(head)
  if (zeros.odd > 0.6 && zeros.even < 0.1) return { kind: 'text', encoding: 'utf-16le', byteOrderMark: false }
  if (zeros.even > 0.6 && zeros.odd < 0.1) return { kind: 'text', encoding: 'utf-16be', byteOrderMark: false }
  const oddControls = head.reduce((count, byte) => count + (isOddControl(byte) ? 1 : 0), 0)
  // A stray zero byte or two in a log file are rows to reject, not a reason to refuse the file.
  if (oddControls > 4 && oddControls / head.length > 0.01) {
    return { kind: 'refused', reason: 'binary', detail: `This is not a text file. ${saveAsCsv}` }
  }
  return { kind: 'text', encoding: isUtf8(head) ? 'utf-8' : 'windows-1252', byteOrderMark: false }
}
