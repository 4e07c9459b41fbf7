import { describe, expect, it } from 'vitest'
import { createLineEndNormaliser, detectDecimalMark, detectDelimiter, guessFilmImportMapping, guessHeaderRows, headerSignature } from '#shared/imports/index.ts'

describe('detectDelimiter', () => {
  it.each([
    ['commas', 't,d\n1.7,0.43\n', ','],
    ['semicolons with decimal commas', 't;d\n1,7;0,43\n2,1;0,51\n', ';'],
    ['semicolons and no header', '1,7;0,43\n2,1;0,51\n', ';'],
    ['tabs with decimal commas', 't\td\n1,7\t0,43\n', '\t'],
    ['bars', 't|d\n1.7|0.43\n', '|'],
    ['commas with a semicolon in one note', 't,d,note\n1,2,"a; b"\n2,3,c; d\n3,4,e\n', ','],
    ['quoted line ends', 't,d,note\n1,2,"a;b\n;c;d;;"\n2,3,x\n', ','],
    ['a single column', 'just text\nmore text\n', ','],
    ['nothing', '', ','],
  ])('finds the delimiter of %s', (_name, text, delimiter) => {
    expect(detectDelimiter(text)).toBe(delimiter)
  })
})

describe('detectDecimalMark', () => {
  it.each([
    [[['1,7', '0,43']], ','],
    [[['1.7', '0.43']], '.'],
    // 1,234 may be a thousand or a little more than one: 0.43 decides.
    [[['1,234', '0.43']], '.'],
    [[['1.234', '0,43']], ','],
    [[['5', '430']], '.'],
    [[], '.'],
  ])('%j is written with %s', (rows, mark) => {
    expect(detectDecimalMark(rows)).toBe(mark)
  })
})

describe('guessHeaderRows', () => {
  it.each([
    ['one header', [['t', 'd'], ['1.7', '0.43']], 1],
    ['none', [['1.7', '0.43']], 0],
    ['names above units and a remark', [['Operator: me'], ['t', 'd'], ['(s)', '(mm)'], ['1.7', '0.43']], 3],
    ['a header and nothing else', [['t', 'd']], 1],
    ['nothing', [], 0],
    ['30 rows of prose: a mapping can skip 20', [...Array.from({ length: 30 }, () => ['prose']), ['1', '2']], 20],
  ])('counts %s', (_name, rows, count) => {
    expect(guessHeaderRows(rows, '.')).toBe(count)
  })
})

describe('guessFilmImportMapping', () => {
  const guess = (rows: readonly (readonly string[])[], kind: 'seconds' | 'mJ/cm2' = 'seconds') =>
    guessFilmImportMapping({ rows, encoding: 'utf-8', delimiter: ';' }, kind)

  it('reads roles and units from English headers', () => {
    const { mapping, unsure } = guess([['Film', 'Exposure (ms)', 'Thickness [µm]', 'Status', 'Uncertainty µm', 'Remark'], ['1', '1700', '430', '', '', '']])
    expect(mapping).toMatchObject({
      exposure: { column: 1, unit: 'ms' }, depth: { column: 2, unit: 'um' }, state: { column: 3 },
      uncertainty: { column: 4, unit: 'um' }, replicate: { column: 0 }, note: { column: 5 },
    })
    expect(unsure).toEqual([])
  })

  it.each([
    ['German', 'Belichtungszeit in s', 'Dicke in mm', 's', 'mm'],
    ['French', 'Temps (s)', 'Épaisseur (mm)', 's', 'mm'],
    ['Spanish', 'Tiempo (s)', 'Espesor (µm)', 's', 'um'],
    ['Italian', 'Tempo [s]', 'Spessore [mil]', 's', 'mil'],
    ['Dutch', 'Belichtingstijd (ms)', 'Dikte (in)', 'ms', 'in'],
  ])('reads %s headers', (_language, exposure, depth, exposureUnit, depthUnit) => {
    expect(guess([[depth, exposure], ['0,43', '1,7']]).mapping).toMatchObject({ exposure: { column: 1, unit: exposureUnit }, depth: { column: 0, unit: depthUnit } })
  })

  it('knows the headers of our own export', () => {
    const { mapping, unsure } = guess([['exposure_mj_per_cm2', 'replicate', 'depth_micrometres', 'standard_uncertainty_micrometres', 'state', 'note'], ['12.5', '1', '430', '', 'measured', '']], 'mJ/cm2')
    expect(mapping).toMatchObject({ exposure: { column: 0, unit: 'mJ/cm2' }, depth: { column: 2, unit: 'um' }, uncertainty: { column: 3, unit: 'um' }, state: { column: 4 }, note: { column: 5 } })
    expect(unsure).toEqual([])
  })

  it('takes the first two columns of numbers where no header helps, and says that it guessed', () => {
    const { mapping, unsure } = guess([['a', '1.7', '0.43'], ['b', '2.1', '0.51']])
    expect(mapping).toMatchObject({ headerRows: 0, exposure: { column: 1, unit: 's' }, depth: { column: 2, unit: 'mm' } })
    expect(unsure).toEqual(['exposure-column', 'depth-column', 'exposure-unit', 'depth-unit'])
  })

  it('takes thicknesses above 10 for µm', () => {
    expect(guess([['t', 'd'], ['1.7', '430'], ['2.1', '510']]).mapping?.depth).toEqual({ column: 1, unit: 'um' })
  })

  it('remarks on two columns of one name and uses the first', () => {
    const { mapping, remarks } = guess([['Depth (mm)', 'time (s)', 'depth (mm)'], ['0.43', '1.7', '0.44']])
    expect(mapping?.depth.column).toBe(0)
    expect(remarks).toEqual(['Two columns are called “depth (mm)”: check which one is meant.'])
  })

  it.each([[[]], [[['only'], ['1.7']]], [[['x', 'y'], ['a', 'b']]]])('gives no mapping for %j', rows => {
    expect(guess(rows).mapping).toBeNull()
  })
})

describe('headerSignature', () => {
  it('ignores case, spacing and empty columns at the end', () => {
    expect(headerSignature([' Exposure  (s)', 'DEPTH', ''])).toBe(headerSignature(['exposure (s)', 'depth']))
  })

  it('keeps the order and the borders of columns', () => {
    expect(headerSignature(['a', 'b'])).not.toBe(headerSignature(['b', 'a']))
    expect(headerSignature(['a b'])).not.toBe(headerSignature(['a', 'b']))
  })
})

describe('createLineEndNormaliser', () => {
  it('gives the same text wherever the chunks are cut', () => {
    const text = 'a\r\nb\rc\n\r\nd\r'
    for (let cut = 0; cut <= text.length; cut++) {
      const lines = createLineEndNormaliser()
      expect(lines.next(text.slice(0, cut)) + lines.next(text.slice(cut)) + lines.end()).toBe('a\nb\nc\n\nd\n')
    }
  })
})
