import { describe, expect, it } from 'vitest'
import fc from 'fast-check'
import { readNumberCell } from '#shared/imports/index.ts'

const valueOf = (cell: string, mark: '.' | ',') => {
  const read = readNumberCell(cell, mark)
  return read.kind === 'number' ? Number(`${read.mantissa}e${read.exponent}`) : read.kind === 'refused' ? read.reason : read.kind
}

describe('readNumberCell', () => {
  it.each([
    ['1.7', 1.7], ['.5', 0.5], ['5.', 5], ['-3', -3], ['+2.5', 2.5], ['\u22122', -2], ['1e3', 1000], ['1.5E-3', 0.0015], ['  4 ', 4],
    ['1,234.5', 1234.5], ['1,234,567', 1_234_567], ['1 234.5', 1234.5], ['1\u202f234', 1234], ['1\u00a0234', 1234], ['1’234.5', 1234.5],
    ['1.234', 1.234], ['1e308', 1e308],
  ])('reads %j with a decimal point', (cell, value) => {
    expect(valueOf(cell, '.')).toBe(value)
  })

  it.each([['1,7', 1.7], [',5', 0.5], ['1.234,5', 1234.5], ['1.234.567', 1_234_567], ['1 234,5', 1234.5], ['1,234', 1.234]])('reads %j with a decimal comma', (cell, value) => {
    expect(valueOf(cell, ',')).toBe(value)
  })

  it.each([
    ['1,234', '.', 'ambiguous-separator'], ['1.234', ',', 'ambiguous-separator'],
    ['1,7', '.', 'other-decimal-mark'], ['1.7', ',', 'other-decimal-mark'],
    ['1.234,5', '.', 'not-a-number'], ['12,34,567', '.', 'not-a-number'], ['1 23', '.', 'not-a-number'], ['1..2', '.', 'not-a-number'], ['abc', '.', 'not-a-number'],
    ['٣', '.', 'not-a-number'], ['1.5 234', '.', 'not-a-number'],
    ['=1+1', '.', 'formula'], ['@SUM(A1)', '.', 'formula'], ['+A1', '.', 'formula'], ['-B2', '.', 'formula'], ['=HYPERLINK("x")', ',', 'formula'],
    ['2024-01-31', '.', 'date-looking'], ['1.2.2024', ',', 'date-looking'], ['3/4/24', '.', 'date-looking'], ['3-Mar', '.', 'date-looking'], ['Jan 12', '.', 'date-looking'], ['12:30', '.', 'date-looking'], ['1/2', '.', 'date-looking'],
    ['NaN', '.', 'error-value'], ['Infinity', '.', 'error-value'], ['-inf', '.', 'error-value'], ['#DIV/0!', '.', 'error-value'], ['#N/A', '.', 'error-value'], ['n/a', '.', 'error-value'],
    ['1\u0000', '.', 'zero-byte'], ['9'.repeat(1001), '.', 'huge-field'],
  ] as const)('refuses %j with decimal mark %s as %s', (cell, mark, reason) => {
    expect(valueOf(cell, mark)).toBe(reason)
  })

  it('takes a cell of 1000 characters, refuses one of 1001', () => {
    expect(readNumberCell('0'.repeat(1000), '.').kind).toBe('number')
    expect(readNumberCell('0'.repeat(1001), '.').kind).toBe('refused')
  })

  it('leaves blanks to the caller', () => {
    expect(readNumberCell(' \t ', '.')).toEqual({ kind: 'empty' })
  })

  it('hands the unit text on', () => {
    expect(readNumberCell('0.43 mm', '.')).toMatchObject({ mantissa: '0.43', unitText: 'mm' })
    expect(readNumberCell('1.234,5ms', ',')).toMatchObject({ mantissa: '1234.5', unitText: 'ms' })
  })

  it('reads back every finite number as JavaScript writes it, under either mark', () => {
    fc.assert(fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), value => {
      const written = String(value)
      // Minus zero is written 0.
      expect(valueOf(written, '.')).toBe(value === 0 ? 0 : value)
      expect(valueOf(written.replace('.', ','), ',')).toBe(value === 0 ? 0 : value)
    }))
  })
})
