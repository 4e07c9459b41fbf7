import { describe, expect, it } from 'vitest'
import type { FilmImportMapping } from '#shared/contracts/film-imports.ts'
import { mappingProblem, readFilmRow } from '#shared/imports/index.ts'
import { plainMapping } from './mapping.ts'

const full: FilmImportMapping = { ...plainMapping, state: { column: 2 }, note: { column: 3 }, uncertainty: { column: 4, unit: 'um' }, replicate: { column: 5 } }
const reasonsOf = (cells: readonly string[], mapping = full) => {
  const outcome = readFilmRow(cells, 2, mapping)
  return outcome.kind === 'rejected' ? outcome.reasons : []
}

describe('readFilmRow', () => {
  it('gives the reading in µm and s and keeps the texts', () => {
    expect(readFilmRow(Object.freeze(['1.7', ' 430 ', '', 'ok so far', '3', '2']), 7, full)).toEqual({
      kind: 'reading', line: 7, exposure: 1.7, exposureText: '1.7 s', depthMicrometres: 430, depthText: '430 µm', standardUncertaintyMicrometres: 3,
      state: 'measured', exclusionReason: null, note: 'ok so far', replicateText: '2', remarks: [],
    })
  })

  it.each([
    ['s', '1.7', 1.7], ['ms', '1700', 1.7], ['ms', '1234.5', 1.2345], ['s', '1700 ms', 1.7],
    ['mJ/cm2', '12.5', 12.5], ['J/m2', '125', 12.5], ['mJ/cm2', '125 J/m²', 12.5], ['J/m2', '12.5 mJ/cm²', 12.5],
  ] as const)('reads an exposure column in %s with %j', (unit, cell, value) => {
    expect(readFilmRow([cell, '430'], 2, { ...plainMapping, exposure: { column: 0, unit } })).toMatchObject({ exposure: value })
  })

  it.each([
    ['um', '430', 430], ['mm', '0.43', 430], ['mm', '0.07', 70], ['mil', '1', 25.4], ['in', '0.01', 254], ['um', '0.43 mm', 430], ['mm', '430 µm', 430], ['mm', '0.01 in', 254],
  ] as const)('reads a thickness column in %s with %j', (unit, cell, value) => {
    expect(readFilmRow(['1.7', cell], 2, { ...plainMapping, depth: { column: 1, unit } })).toMatchObject({ depthMicrometres: value })
  })

  it('adds the unit of the column to a bare number and leaves a unit that was written', () => {
    expect(readFilmRow(['1700', '0.43 mm'], 2, { ...plainMapping, exposure: { column: 0, unit: 'ms' } })).toMatchObject({ exposureText: '1700 ms', depthText: '0.43 mm' })
    expect(readFilmRow(['1.7', 'no film'], 2, plainMapping)).toMatchObject({ depthText: 'no film' })
  })

  it('subtracts the substrate without binary crumbs', () => {
    expect(readFilmRow(['1.7', '1.03'], 2, { ...plainMapping, depth: { column: 1, unit: 'mm' }, substrateThicknessMicrometres: 999.9 })).toMatchObject({ depthMicrometres: 30.1, depthText: '1.03 mm' })
  })

  it.each([
    ['empty exposure', ['', '430'], 'Exposure: the cell is empty.'],
    ['zero exposure', ['0', '430'], 'Exposure: is zero; an exposure must be above zero.'],
    ['negative exposure', ['-1.7', '430'], 'Exposure: is negative; an exposure must be above zero.'],
    ['an exposure of 1e308', ['1e308', '430'], 'Exposure: is too large to be meant.'],
    ['an exposure past the largest number', ['1e999', '430'], 'Exposure: is too large to be meant.'],
    ['an energy in a column of seconds', ['12 mJ/cm²', '430'], 'Exposure: the cell says “mJ/cm²”, the column is in s.'],
    ['an unknown unit', ['12 kg', '430'], 'Exposure: the cell says “kg”, the column is in s.'],
    ['empty thickness', ['1.7', ''], 'Thickness: the cell is empty; write the thickness, or a state such as “no film”.'],
    ['a short row', ['1.7'], 'Thickness: the cell is empty; write the thickness, or a state such as “no film”.'],
    ['a thickness of 1e308', ['1.7', '1e308'], 'Thickness: is more than 100 mm, too much to be meant.'],
    ['a thickness in seconds', ['1.7', '430 s'], 'Thickness: the cell says “s”, the column is in µm.'],
    ['a state that is none', ['1.7', '430', 'maybe'], 'State: “maybe” is none of measured, no film, lost in wash, excluded.'],
    ['measured with thickness 0', ['1.7', '0', 'measured'], 'Thickness: is 0, but the state says measured; a film that did not form is “no film”.'],
    ['no film with a thickness', ['1.7', '430', 'no film'], 'Thickness: there is one, but the state says no film.'],
    ['an uncertainty of 0', ['1.7', '430', '', '', '0'], 'Uncertainty: must be above zero; leave it empty where it is not known.'],
    ['film number 0', ['1.7', '430', '', '', '', '0'], 'Film number: must be 1 to 100000.'],
    ['film number 100001', ['1.7', '430', '', '', '', '100001'], 'Film number: must be 1 to 100000.'],
    ['a note of 401 characters', ['1.7', '430', '', 'n'.repeat(401)], 'Note: has more than 400 characters.'],
    ['a zero byte anywhere', ['1.7', '430', '', 'a\0b'], 'The row holds a zero byte, which no text file should.'],
    ['a cell of 1001 characters in a column that is not used', ['1.7', '430', '', '', '', '', 'x'.repeat(1001)], 'Column 7: has more than 1000 characters: is a quotation mark missing?'],
  ])('rejects %s with its reason', (_name, cells, reason) => {
    expect(reasonsOf(cells)).toEqual([reason])
  })

  it('gives every reason of a row, not only the first', () => {
    expect(reasonsOf(['x', 'y', 'z'])).toHaveLength(3)
  })

  it.each([
    ['exposure 1e9', ['1000000000', '430']], ['thickness 100 mm', ['1.7', '100000']], ['film number 1', ['1.7', '430', '', '', '', '1']],
    ['film number 100000', ['1.7', '430', '', '', '', '100000']], ['a note of 400 characters', ['1.7', '430', '', 'n'.repeat(400)]],
  ])('takes %s, the last that fits', (_name, cells) => {
    expect(reasonsOf(cells)).toEqual([])
  })

  it('takes a thickness of 0 without a state as no film, and says so', () => {
    expect(readFilmRow(['1.2', '0.00'], 2, full)).toMatchObject({ state: 'no-film', depthMicrometres: null, depthText: '0.00 µm', note: 'Thickness 0 in the file, taken as no film.', remarks: ['A thickness of 0 is taken as “no film”.'] })
  })

  it('keeps a negative thickness and remarks on it', () => {
    expect(readFilmRow(['1.2', '-3'], 2, full)).toMatchObject({ state: 'measured', depthMicrometres: -3, remarks: [expect.stringContaining('negative')] })
  })

  it.each([
    ['no film', 'no-film'], ['kein Film', 'no-film'], ['Pas de film', 'no-film'], ['lost', 'lost-in-wash'], ['Lost in wash', 'lost-in-wash'], ['perdu', 'lost-in-wash'],
  ])('reads %j in the thickness or the state column', (word, state) => {
    expect(readFilmRow(['1.2', word], 2, plainMapping)).toMatchObject({ state, depthMicrometres: null })
    expect(readFilmRow(['1.2', '', word], 2, full)).toMatchObject({ state, depthMicrometres: null })
  })

  it('keeps the thickness of an excluded film and its note as the reason', () => {
    expect(readFilmRow(['1.2', '430', 'excluded', 'torn'], 2, full)).toMatchObject({ state: 'excluded', depthMicrometres: 430, exclusionReason: 'torn' })
    expect(readFilmRow(['1.2', '430', 'excluded', ''], 2, full)).toMatchObject({ exclusionReason: 'Excluded in the imported file.' })
  })

  it('keeps a formula in a note as text', () => {
    expect(readFilmRow(['1.2', '430', '', '=1+1'], 2, full)).toMatchObject({ kind: 'reading', note: '=1+1' })
  })

  it('takes off the apostrophe that our exports put before such a text', () => {
    expect(readFilmRow(['1.2', '430', '', "'=1+1"], 2, full)).toMatchObject({ note: '=1+1' })
    expect(readFilmRow(['1.2', '430', '', "'tis torn"], 2, full)).toMatchObject({ note: "'tis torn" })
  })
})

describe('mappingProblem', () => {
  it.each([['mJ/cm2', 'seconds'], ['J/m2', 'seconds'], ['s', 'mJ/cm2'], ['ms', 'mJ/cm2']] as const)('refuses %s in a study that counts in %s', (unit, kind) => {
    expect(mappingProblem({ ...plainMapping, exposure: { column: 0, unit } }, kind)).toContain('not converted')
  })

  it.each([['s', 'seconds'], ['ms', 'seconds'], ['mJ/cm2', 'mJ/cm2'], ['J/m2', 'mJ/cm2']] as const)('takes %s in a study that counts in %s', (unit, kind) => {
    expect(mappingProblem({ ...plainMapping, exposure: { column: 0, unit } }, kind)).toBeNull()
  })

  it('refuses one column for two meanings', () => {
    expect(mappingProblem({ ...plainMapping, depth: { column: 0, unit: 'um' } }, 'seconds')).toContain('two meanings')
  })
})
