import { describe, expect, it } from 'vitest'
import { detectEncoding } from '#shared/imports/index.ts'

const utf8 = (text: string) => new TextEncoder().encode(text)
const utf16 = (text: string, littleEndian: boolean, mark: boolean) => {
  const codes = [...(mark ? '\uFEFF' : ''), ...text].map(character => character.codePointAt(0) ?? 0)
  return new Uint8Array(codes.flatMap(code => (littleEndian ? [code & 0xff, code >> 8] : [code >> 8, code & 0xff])))
}

describe('detectEncoding', () => {
  it.each([
    ['UTF-8 without a mark', utf8('Zeit;Dicke in µm\n1,7;430\n'), 'utf-8', false],
    ['UTF-8 with a mark', utf8('\uFEFFt,d\n'), 'utf-8', true],
    ['plain ASCII', utf8('t,d\n1.7,0.43\n'), 'utf-8', false],
    ['UTF-16 little-endian with a mark', utf16('t,d\n1,2\n', true, true), 'utf-16le', true],
    ['UTF-16 big-endian with a mark', utf16('t,d\n1,2\n', false, true), 'utf-16be', true],
    ['UTF-16 little-endian without a mark', utf16('t,d\n1.7,0.43\n', true, false), 'utf-16le', false],
    ['UTF-16 big-endian without a mark', utf16('t,d\n1.7,0.43\n', false, false), 'utf-16be', false],
    // 0xb5 is µ in windows-1252 and no beginning of a UTF-8 character.
    ['windows-1252', new Uint8Array([0x64, 0x20, 0xb5, 0x6d, 0x0a]), 'windows-1252', false],
  ])('recognises %s', (_name, bytes, encoding, byteOrderMark) => {
    expect(detectEncoding(bytes)).toEqual({ kind: 'text', encoding, byteOrderMark })
  })

  it('takes a sample that ends inside a UTF-8 character for UTF-8', () => {
    expect(detectEncoding(utf8('dµ').slice(0, 2))).toMatchObject({ encoding: 'utf-8' })
  })

  it('keeps a text with one stray zero byte: its row is rejected later, the file is not', () => {
    expect(detectEncoding(utf8(`t,d\n1.7,4\0 30\n${'2.1,500\n'.repeat(40)}`))).toMatchObject({ kind: 'text', encoding: 'utf-8' })
  })

  it.each([
    ['an empty file', [], 'empty-file'],
    ['a zip or xlsx', [0x50, 0x4b, 0x03, 0x04, 0x14, 0], 'spreadsheet'],
    ['an old spreadsheet', [0xd0, 0xcf, 0x11, 0xe0, 0xa1, 0xb1], 'spreadsheet'],
    ['gzip', [0x1f, 0x8b, 0x08, 0], 'compressed'],
    ['PDF', [0x25, 0x50, 0x44, 0x46, 0x2d], 'other-document'],
    ['bytes without meaning', Array.from({ length: 400 }, (_, i) => (i * 37) % 23), 'binary'],
  ])('refuses %s by name', (_name, bytes, reason) => {
    expect(detectEncoding(new Uint8Array(bytes))).toMatchObject({ kind: 'refused', reason })
  })

  it('tells the owner of a spreadsheet to save it as CSV', () => {
    expect(detectEncoding(new Uint8Array([0x50, 0x4b, 0x03, 0x04]))).toMatchObject({ detail: expect.stringContaining('save the sheet as CSV') })
  })
})
