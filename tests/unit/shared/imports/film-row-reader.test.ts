import Papa from 'papaparse'
import { describe, expect, it } from 'vitest'
import type { FilmImportMapping } from '#shared/contracts/film-imports.ts'
import { createFilmRowReader, createRowSplitter, csvTokeniserOptions, rowCharactersMax, tokeniserOf, type ReaderOutcome } from '#shared/imports/index.ts'
import { plainMapping } from './mapping.ts'

const splitterFor = (mapping: FilmImportMapping) => createRowSplitter(tokeniserOf(new Papa.Parser(csvTokeniserOptions(mapping.delimiter))))

function read(text: string, mapping: FilmImportMapping = plainMapping, cut = text.length): readonly ReaderOutcome[] {
  const splitter = splitterFor(mapping)
  const reader = createFilmRowReader(mapping)
  return [splitter.next(text.slice(0, cut)), splitter.next(text.slice(cut)), splitter.end()]
    .flatMap(outcome => (outcome.kind === 'rows' ? outcome.rows : []))
    .map(row => reader.row(row.cells, row.quotes))
}
const lines = (outcomes: readonly ReaderOutcome[]) => outcomes.map(outcome => ('line' in outcome ? `${outcome.kind} ${outcome.line}` : outcome.kind))

describe('createFilmRowReader', () => {
  const noted: FilmImportMapping = { ...plainMapping, note: { column: 2 } }

  it('counts lines through blank rows and quoted line ends', () => {
    const text = 't,d,note\n1.7,430,"two\nlines"\n\n2.1,500,x\nbad,510,\n'
    expect(lines(read(text, noted))).toEqual(['header', 'reading 2', 'blank', 'reading 5', 'rejected 6'])
  })

  it('gives the same rows wherever the text is cut, with mixed line ends and quotes', () => {
    const text = 't,d,note\r\n1.7,430,"a ""b""\r\nc"\r2.1,500,"x,y"\n3.1,600,'
    const whole = read(text, noted)
    expect(lines(whole)).toEqual(['header', 'reading 2', 'reading 4', 'reading 5'])
    expect(whole[1]).toMatchObject({ note: 'a "b"\nc' })
    for (let cut = 0; cut < text.length; cut++) expect(read(text, noted, cut)).toEqual(whole)
  })

  it('rejects a row wider than its header: unquoted decimal commas make cells of numbers', () => {
    expect(read('t,d\n1,7,430\n2.1,500\n')).toMatchObject([{ kind: 'header' }, { kind: 'rejected', reasons: ['The row has 3 cells, the header 2: is a decimal comma or delimiter not quoted?'] }, { kind: 'reading', line: 3 }])
  })

  it('ignores empty cells at the end of a row', () => {
    expect(lines(read('t,d\n1.7,430,,,\n'))).toEqual(['header', 'reading 2'])
  })

  it('measures the width by the first row where there is no header', () => {
    expect(lines(read('1.7,430\n2,1,500\n', { ...plainMapping, headerRows: 0 }))).toEqual(['reading 1', 'rejected 2'])
  })

  it('refuses the file when a chosen column is not there, and says how many there are', () => {
    expect(read('t;d\n1.7;430\n').at(-1)).toEqual({ kind: 'file-refused', sentence: 'The mapping points at column 2, the file has 1. Check the delimiter and the columns.' })
  })

  it('takes 500 columns and rejects a row of 501', () => {
    const row = (n: number) => `1.7,430${','.repeat(n - 3)},x`
    expect(lines(read(`${row(500)}\n`, { ...plainMapping, headerRows: 0 }))).toEqual(['reading 1'])
    expect(lines(read(`${row(501)}\n`, { ...plainMapping, headerRows: 0 }))).toEqual(['rejected 1'])
  })

  it('rejects a second row for one film of one exposure, with the line of the first', () => {
    const mapping: FilmImportMapping = { ...plainMapping, replicate: { column: 2 } }
    expect(read('t,d,film\n1.7,430,1\n1.7,440,2\n2.1,500,1\n1.70,431,1\n', mapping).at(-1)).toMatchObject({ kind: 'rejected', line: 5, reasons: [expect.stringContaining('line 2')] })
  })

  it('rejects the run-together row of unpaired quotes and names its lines', () => {
    const outcome = read('t,d,note\n1.7,430,"a" b\n2.1,500,"c"\n3.1,600,x\n', noted)
    expect(outcome[1]).toMatchObject({ kind: 'rejected', line: 2, reasons: ['Quotation marks do not pair up: lines 2 to 3 run together.'] })
    expect(outcome[2]).toMatchObject({ kind: 'reading', line: 4 })
  })

  it('refuses the file when a quotation mark is never closed', () => {
    expect(read('t,d,note\n1.7,430,"a\n2.1,500,x\n', noted).at(-1)).toMatchObject({ kind: 'file-refused', sentence: expect.stringContaining('line 2') })
  })

  it('keeps a quotation mark inside a bare cell as text', () => {
    expect(read('t,d,note\n1.7,430,the 5" one\n', noted)[1]).toMatchObject({ note: 'the 5" one' })
  })
})

describe('createRowSplitter', () => {
  it('gives up on a row without end instead of holding the file', () => {
    const splitter = splitterFor(plainMapping)
    expect(splitter.next('a,"')).toMatchObject({ kind: 'rows' })
    let kind = 'rows'
    for (let length = 0; kind === 'rows' && length <= rowCharactersMax; length += 100_000) kind = splitter.next('x'.repeat(100_000)).kind
    expect(kind).toBe('endless-row')
  })
})
