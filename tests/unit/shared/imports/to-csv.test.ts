import fc from 'fast-check'
import Papa from 'papaparse'
import { describe, expect, it } from 'vitest'
import { csvCell, toCsv } from '#shared/imports/index.ts'

describe('csvCell', () => {
  it.each([
    ['=1+1', "'=1+1"], ['+A1', "'+A1"], ['-A1', "'-A1"], ['@x', "'@x"], ['\tx', "'\tx"], ['\rx', "\"'\rx\""],
    ['=HYPERLINK("a")', '"\'=HYPERLINK(""a"")"'], ['-3.5', '-3.5'], ['+2e-3', '+2e-3'], ['-', "'-"], ['=', "'="],
    ['plain', 'plain'], ['a,b', '"a,b"'], ['a"b', '"a""b"'], ['a\nb', '"a\nb"'], [' padded ', '" padded "'], ['', ''],
  ])('writes %j as %j', (value, cell) => {
    expect(csvCell(value)).toBe(cell)
  })

  it('writes numbers as they are and null as nothing', () => {
    expect([csvCell(-3.5), csvCell(1e-7), csvCell(null)]).toEqual(['-3.5', '1e-7', ''])
  })

  it.each([Number.NaN, Number.POSITIVE_INFINITY])('refuses %s', value => {
    expect(() => csvCell(value)).toThrow(RangeError)
  })
})

describe('toCsv', () => {
  it('ends every line with CR LF', () => {
    expect(toCsv([['a', 'b'], [1, null]])).toBe('a,b\r\n1,\r\n')
  })

  it('is read back cell by cell by another parser, whatever the texts hold', () => {
    const text = fc.string({ unit: 'grapheme' }).map(s => s.replaceAll('\0', ''))
    fc.assert(fc.property(fc.array(fc.array(text, { minLength: 3, maxLength: 3 }), { minLength: 1, maxLength: 5 }), fc.constantFrom(',', ';', '\t'), (rows, delimiter) => {
      const read = Papa.parse<string[]>(toCsv(rows, { delimiter }), { delimiter, newline: '\r\n' }).data.slice(0, -1)
      const plain = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/
      expect(read).toEqual(rows.map(row => row.map(cell => (/^[=+\-@\t\r]/.test(cell) && !plain.test(cell) ? `'${cell}` : cell))))
    }))
  })
})
