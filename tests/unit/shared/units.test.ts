import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  decimalsFor,
  exposureUnitLabel,
  formatEstimate,
  formatExposure,
  formatInterval,
  formatLength,
  formatNumber,
  parseExposure,
  parseLength,
} from '#shared/units.ts'

const micrometres = (text: string, options?: Parameters<typeof parseLength>[1]) => {
  const parsed = parseLength(text, options)
  return parsed.kind === 'value' ? parsed.value : parsed.reason
}
const exposure = (text: string, options?: Parameters<typeof parseExposure>[1]) => {
  const parsed = parseExposure(text, options)
  return parsed.kind === 'value' ? parsed.value : parsed.reason
}

describe('parseLength', () => {
  it.each([
    ['85', 85],
    ['85 µm', 85],
    ['85 μm', 85],
    ['85um', 85],
    ['85 µ', 85],
    ['85 microns', 85],
    ['0.085 mm', 85],
    ['0,085 mm', 85],
    [' 85 ', 85],
    ['85\u00a0µm', 85],
    ['85\u202fµm', 85],
    ['+85', 85],
    ['1e2', 100],
    ['3 mil', 76.2],
    ['0.003 in', 76.2],
    ['0.003"', 76.2],
    ['.5 mm', 500],
    [',5 mm', 500],
  ])('reads %j as %s µm', (text, value) => {
    expect(micrometres(text)).toBeCloseTo(value, 10)
  })

  it('is exact for powers of ten: 0.07 mm is 70 µm', () => {
    expect(micrometres('0.07 mm')).toBe(70)
    expect(micrometres('0.0825 mm')).toBe(82.5)
  })

  it.each([
    ['1.234', 1.234],
    ['1.234,5', 1234.5],
    ['1,234.5', 1234.5],
    ['1 234,5', 1234.5],
    ["1'234.5", 1234.5],
    ['12,5', 12.5],
    ['0,125', 0.125],
    ['12,3456', 12.3456],
    ['1,234', 'ambiguous-separator'],
    ['10,085', 'ambiguous-separator'],
    ['1.2.3', 'not-a-number'],
    ['1,2,3', 'not-a-number'],
    ['1.23,4.5', 'not-a-number'],
  ])('decimal marks and thousands: %j gives %s', (text, value) => {
    expect(micrometres(text)).toBe(value)
  })

  it.each([
    ['-5', -5],
    ['\u22125', -5],
    ['\u22125 µm', -5],
    ['\u2013 5', -5],
    ['- 5 µm', -5],
  ])('takes the sign of %j where a film may be below zero', (text, value) => {
    expect(micrometres(text)).toBe(value)
    expect(micrometres(text, { sign: 'positive' })).toBe('not-positive')
  })

  it('has no negative zero', () => {
    expect(Object.is(micrometres('-0'), 0)).toBe(true)
  })

  it.each([
    ['', 'empty'],
    ['   ', 'empty'],
    ['abc', 'not-a-number'],
    ['µm', 'not-a-number'],
    ['=2+3', 'formula'],
    ['n/a', 'error-value'],
    ['#REF!', 'error-value'],
    ['1/2', 'date-looking'],
    ['85 furlong', 'unknown-unit'],
    ['85 s', 'unknown-unit'],
    ['85 m', 'unknown-unit'],
    ['101 mm', 'too-large'],
    ['1e400', 'too-large'],
  ])('refuses %j: %s, with a sentence', (text, reason) => {
    const parsed = parseLength(text)
    expect(parsed).toMatchObject({ kind: 'refused', reason })
    if (parsed.kind === 'refused') expect(parsed.detail).toMatch(/^[A-Z“].*[.?]$/)
  })

  it('takes 100 mm and refuses the next digit', () => {
    expect(micrometres('100 mm')).toBe(100_000)
    expect(micrometres('100.001 mm')).toBe('too-large')
  })

  it('takes the default unit only where none is typed', () => {
    expect(parseLength('0.05', { defaultUnit: 'mm' })).toEqual({
      kind: 'value',
      value: 50,
      unit: 'mm',
      text: '0.05',
    })
    expect(parseLength('50 um', { defaultUnit: 'mm' })).toMatchObject({ value: 50, unit: 'um' })
  })

  it('gives back any number that is typed plainly, with point or comma', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: -99_999, max: 99_999 }),
        fc.integer({ min: 0, max: 99 }),
        (whole, hundredths) => {
          const digits = `${whole}.${String(hundredths).padStart(2, '0')}`
          expect(micrometres(digits)).toBe(Number(digits) === 0 ? 0 : Number(digits))
          expect(micrometres(digits.replace('.', ','))).toBe(Number(digits) === 0 ? 0 : Number(digits))
        },
      ),
    )
  })

  it('never throws, whatever is typed', () => {
    fc.assert(
      fc.property(fc.string({ unit: 'grapheme' }), text =>
        ['value', 'refused'].includes(parseLength(text).kind),
      ),
    )
  })
})

describe('parseExposure', () => {
  it.each([
    ['1.7', 1.7, 'seconds'],
    ['1,7 s', 1.7, 'seconds'],
    ['1700ms', 1.7, 'seconds'],
    ['2 sec', 2, 'seconds'],
    ['12 mJ/cm2', 12, 'mJ/cm2'],
    ['12 mJ/cm²', 12, 'mJ/cm2'],
    ['12 mJ cm⁻²', 12, 'mJ/cm2'],
    ['120 J/m2', 12, 'mJ/cm2'],
    ['+12 mJ/cm²', 12, 'mJ/cm2'],
  ] as const)('reads %j as %s %s', (text, value, exposureKind) => {
    expect(parseExposure(text)).toMatchObject({ kind: 'value', value, exposureKind })
  })

  it('takes the unit of the study where none is typed, and refuses the other kind', () => {
    expect(parseExposure('12', { exposureKind: 'mJ/cm2' })).toMatchObject({ value: 12, unit: 'mJ/cm2' })
    expect(exposure('12 s', { exposureKind: 'mJ/cm2' })).toBe('dose-expected')
    expect(exposure('12 mJ/cm2', { exposureKind: 'seconds' })).toBe('seconds-expected')
    expect(exposure('1700', { defaultUnit: 'ms' })).toBe(1.7)
  })

  it.each([
    ['0', 'not-positive'],
    ['0.00', 'not-positive'],
    ['-1 s', 'not-positive'],
    ['-3 mJ/cm2', 'not-positive'],
    ['1e-400 s', 'too-small'],
    ['2e9', 'too-large'],
    ['5 min', 'unknown-unit'],
    ['5 µm', 'unknown-unit'],
    ['', 'empty'],
  ])('refuses %j: %s', (text, reason) => {
    expect(exposure(text)).toBe(reason)
  })
})

describe('numbers as shown', () => {
  it.each([
    // Leading digits 100 to 354 leave two, 355 to 949 one, 950 on count as the next power with two.
    [0.075, 2],
    [0.0354, 3],
    [0.0355, 2],
    [0.0949, 2],
    [0.095, 2],
    [0.1, 2],
    [1, 1],
    [12, 0],
    [40, -1],
    [355, -2],
    [0, 3],
    [Infinity, 3],
  ])('an uncertainty of %s leaves %s decimals', (uncertainty, decimals) => {
    expect(decimalsFor(uncertainty)).toBe(decimals)
  })

  it.each([
    [1.7031, 1.6302, 1.7799, 's', '1.70 s, 1.63 to 1.78'],
    [99.18, 95.42, 102.94, 'µm', '99 µm, 95 to 103'],
    [9.874, 9.237, 10.509, 'mJ/cm²', '9.9 mJ/cm², 9.2 to 10.5'],
    [1_234_567, 1_200_000, 1_300_000, 's', '1230000 s, 1200000 to 1300000'],
    [-0.001, -1, 1, 'µm', '0.0 µm, -1.0 to 1.0'],
    [2, 2, 2, 's', '2.000 s, 2.000 to 2.000'],
  ])('%s from %s to %s %s is shown as %j', (value, lower, upper, unit, shown) => {
    expect(formatEstimate({ value, interval: { kind: 'finite', lower, upper } }, { unit })).toBe(shown)
  })

  it('never shows an interval that is none', () => {
    expect(formatEstimate({ value: 3.21, interval: { kind: 'unbounded' } }, { unit: 's' })).toBe(
      '3.2 s, not determined',
    )
    expect(formatInterval({ kind: 'exclusive', roots: [1, 2] })).toBe(
      'not determined: only 1.0 to 2.0 is ruled out',
    )
  })

  it('shows lengths and exposures that stand alone', () => {
    expect(formatLength(83.82)).toBe('84 µm')
    expect(formatLength(4.25)).toBe('4.3 µm')
    expect(formatExposure(1.7, 'seconds')).toBe('1.70 s')
    expect(formatExposure(1234.5, 'mJ/cm2')).toBe('1235 mJ/cm²')
    expect(formatNumber(-0.001, 2)).toBe('0.00')
    expect(formatNumber(1234, -2)).toBe('1200')
    expect(exposureUnitLabel('seconds')).toBe('s')
  })

  it('shows numbers that can be typed back', () => {
    fc.assert(
      fc.property(fc.double({ min: 0.01, max: 5000, noNaN: true }), value => {
        const parsed = parseExposure(formatExposure(value, 'seconds'))
        expect(parsed.kind).toBe('value')
        if (parsed.kind === 'value') expect(Math.abs(parsed.value / value - 1)).toBeLessThan(0.006)
      }),
    )
  })
})
