import { gzipSync } from 'node:zlib'
import { v7 } from 'uuid'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { problemSchema } from '#shared/contracts/error.ts'
import { importBytesMax, importFilmReadings, importRowsMax } from '#shared/contracts/film-imports.ts'
import { listFilmReadings } from '#shared/contracts/film.ts'
import { csvHeaders, importPath, plainImportMapping, startFilmShop, type FilmClient, type FilmShop } from '#tests/helpers/film-shop.ts'

let shop: FilmShop
let technician: FilmClient
let ids: Awaited<ReturnType<FilmShop['makeShop']>>
let path: string

beforeAll(async () => {
  shop = await startFilmShop()
  ids = await shop.makeShop()
  technician = await shop.signIn(ids.shopId, 'technician')
})
beforeEach(async () => {
  ({ path } = await shop.makeStudy(ids))
})
afterAll(() => shop.close())

type File = string | Uint8Array
const put = (body: unknown, mapping: unknown = plainImportMapping, headers: Readonly<Record<string, string>> = csvHeaders) =>
  technician.send('PUT', importPath(path, v7(), mapping), { body, headers })
const readings = async () => {
  const response = await technician.send('GET', `${path}/film-readings`)
  return listFilmReadings.response?.parse(await response.json()).items ?? []
}
const utf16 = (text: string, littleEndian: boolean, mark: string) => {
  const bytes = Buffer.from(mark + text, 'utf16le')
  return new Uint8Array(littleEndian ? bytes : bytes.swap16())
}
const latin1 = (text: string) => new Uint8Array(Buffer.from(text, 'latin1'))
const semicolons = { ...plainImportMapping, delimiter: ';', decimalMark: ',' }
const noted = { ...plainImportMapping, note: { column: 2 } }

interface Taken {
  readonly file: File
  readonly mapping?: unknown
  /** exposure/thickness of what went in. */
  readonly stored: readonly string[]
  /** Line and a piece of the reason of what did not. */
  readonly rejected?: readonly (readonly [number, string])[]
}

const taken: Readonly<Record<string, Taken>> = {
  'UTF-8 with a byte order mark': { file: '\uFEFFt,d\n1.7,0.43\n', stored: ['1.7/430'] },
  'UTF-16 little-endian with a mark': { file: utf16('t,d\n1.7,0.43\n', true, '\uFEFF'), mapping: { ...plainImportMapping, encoding: 'utf-16le' }, stored: ['1.7/430'] },
  'UTF-16 big-endian with a mark': { file: utf16('t,d\n1.7,0.43\n', false, '\uFEFF'), mapping: { ...plainImportMapping, encoding: 'utf-16be' }, stored: ['1.7/430'] },
  'UTF-16 without a mark': { file: utf16('t,d\n1.7,0.43\n', true, ''), mapping: { ...plainImportMapping, encoding: 'utf-16le' }, stored: ['1.7/430'] },
  'windows-1252 with µ and °': { file: latin1('Zeit;Dicke µm;bei 23°\n1,7;0,43;\n'), mapping: { ...semicolons, encoding: 'windows-1252' }, stored: ['1.7/430'] },
  'semicolons with decimal commas and thousands points': { file: 't;d\n1,7;0,43\n1.700,5;0,5\n', mapping: semicolons, stored: ['1.7/430', '1700.5/500'] },
  'tabs with decimal commas': { file: 't\td\n1,7\t0,43\n', mapping: { ...semicolons, delimiter: '\t' }, stored: ['1.7/430'] },
  'spaces and apostrophes between thousands': { file: 't;d\n1 700,5;0,43\n2\u00a0000;0,4\n3’000;0,4\n', mapping: semicolons, stored: ['1700.5/430', '2000/400', '3000/400'] },
  'line ends of every kind': { file: 't,d\r\n1,0.1\r2,0.2\n3,0.3\r\n4,0.4', stored: ['1/100', '2/200', '3/300', '4/400'] },
  'quoted line ends and commas in notes': { file: 't,d,n\n1.7,0.43,"a,\nb ""c"""\n2,0.5,x\n', mapping: noted, stored: ['1.7/430', '2/500'] },
  'duplicate headers': { file: 'd,d\n1.7,0.43\n', stored: ['1.7/430'] },
  'no header at all': { file: '1.7,0.43\n', mapping: { ...plainImportMapping, headerRows: 0 }, stored: ['1.7/430'] },
  'a row of 501 columns': { file: `t,d\n1.7,0.43\n2,0.5${',x'.repeat(499)}\n`, stored: ['1.7/430'], rejected: [[3, 'has 501 cells']] },
  'zero bytes in one row': { file: `t,d\n1.7,0.4\0 3\n2,0.5\n${'3,0.6\n'.repeat(1)}`, stored: ['2/500', '3/600'], rejected: [[2, 'zero byte']] },
  'a field of 1001 characters': { file: `t,d,n\n1.7,0.43,${'x'.repeat(1001)}\n2,0.5,y\n`, mapping: noted, stored: ['2/500'], rejected: [[2, 'more than 1000 characters']] },
  'a field of 900 kB': { file: `t,d,n\n1.7,0.43,${'x'.repeat(900_000)}\n2,0.5,y\n`, mapping: noted, stored: ['2/500'], rejected: [[2, 'more than 1000 characters']] },
  'formulas': {
    file: 't,d,n\n=1+1,0.43,\n1.7,"=HYPERLINK(""http://quillmere.example"")",\n@SUM(A1),0.4,\n+A1,0.4,\n1.8,0.44,=1+1\n', mapping: noted, stored: ['1.8/440'],
    rejected: [[2, 'formula'], [3, 'formula'], [4, 'formula'], [5, 'formula']],
  },
  'numbers that are none': {
    file: 't,d\nNaN,0.4\nInfinity,0.4\n1e308,0.4\n1e999,0.4\n-1,0.4\n0,0.4\n1.7,NaN\n1.7,1e308\n0x10,0.4\n#DIV/0!,0.4\n1.7,-0.001\n', stored: ['1.7/-1'],
    rejected: [[2, 'no measured value'], [3, 'no measured value'], [4, 'too large'], [5, 'too large'], [6, 'negative'], [7, 'zero'], [8, 'no measured value'], [9, '100 mm'], [10, 'x10'], [11, 'no measured value']],
  },
  'separators that may mean two things': { file: 't;d\n1.234;0,43\n1,7;0.430\n2;0,5\n', mapping: semicolons, stored: ['2/500'], rejected: [[2, 'thousands separator'], [3, 'thousands separator']] },
  'unquoted decimal commas': { file: 't,d\n1,7,0,43\n2,0.5\n', stored: ['2/500'], rejected: [[2, 'decimal comma']] },
  'dates where numbers were': { file: 't,d\n2024-03-01,0.43\n1.7,3-Mar\n2,0.5\n', stored: ['2/500'], rejected: [[2, 'date'], [3, 'date']] },
  'units of another kind': { file: 't,d\n12 mJ/cm²,0.43\n1.7,430 kg\n1.8,430 µm\n', stored: ['1.8/430'], rejected: [[2, 'mJ/cm²'], [3, 'kg']] },
  'thickness zero': { file: 't,d\n1.2,0\n1.7,0.43\n', stored: ['1.2/null', '1.7/430'] },
  'quotation marks that do not pair up in one row': { file: 't,d,n\n1.7,0.43,"a" b\n2.1,0.5,"c"\n3.1,0.6,x\n', mapping: noted, stored: ['3.1/600'], rejected: [[2, 'lines 2 to 3']] },
  'inch marks in bare notes': { file: 't,d,n\n1.7,0.43,5" glass\n', mapping: noted, stored: ['1.7/430'] },
  'letters of every script and pictures': { file: 't,d,n\n1.7,0.43,"µ ñ 漢字 🔬 \u202eabc"\n', mapping: noted, stored: ['1.7/430'] },
  'a picture cut in half by the limit of a stored cell': { file: `t,d,n\nx,0.43,${'n'.repeat(999)}🔬\n`, mapping: noted, stored: [], rejected: [[2, 'more than 1000 characters']] },
  'rows of blanks and a missing last line end': { file: 't,d\n\n  ,\n1.7,0.43\n,\n', stored: ['1.7/430'] },
}

describe('a file that is not quite right', () => {
  it.each(Object.entries(taken))('%s', async (_name, { file, mapping, stored, rejected = [] }) => {
    const response = await put(file, mapping)
    expect(response.status).toBe(201)
    const answer = importFilmReadings.response?.parse(await response.json())
    expect((await readings()).map(reading => `${reading.exposure}/${reading.depthMicrometres}`)).toEqual(stored)
    expect(answer?.batch).toMatchObject({ acceptedRows: stored.length, rejectedRows: rejected.length })
    expect(answer?.rejected.map(row => row.line)).toEqual(rejected.map(([line]) => line))
    rejected.forEach(([, piece], i) => expect(answer?.rejected[i]?.reasons.join(' ')).toContain(piece))
  })
})

interface Refused {
  readonly file: File
  readonly mapping?: unknown
  readonly status: number
  readonly says: string
  readonly headers?: Readonly<Record<string, string>>
}

const good = 't,d\n1.7,0.43\n'
const refused: Readonly<Record<string, Refused>> = {
  'an empty file': { file: '', status: 422, says: 'empty' },
  'a header and nothing else': { file: 't,d\n', status: 422, says: 'no rows below it' },
  'blank lines only': { file: '\n\n\n', mapping: { ...plainImportMapping, headerRows: 0 }, status: 422, says: 'no rows' },
  'a spreadsheet or zip': { file: new Uint8Array([0x50, 0x4b, 3, 4, ...Array.from({ length: 600 }, (_, i) => i % 256)]), status: 422, says: 'save the sheet as CSV' },
  'an old spreadsheet': { file: new Uint8Array([0xd0, 0xcf, 0x11, 0xe0, 0xa1, 0xb1, 0x1a, 0xe1]), status: 422, says: 'save the sheet as CSV' },
  'a gzip file': { file: new Uint8Array(gzipSync(good)), status: 422, says: 'compressed' },
  'a PDF': { file: '%PDF-1.7\n1 0 obj\n', status: 422, says: 'PDF' },
  'bytes without meaning': { file: new Uint8Array(Array.from({ length: 5000 }, (_, i) => (i * 7919) % 31)), status: 422, says: 'not a text file' },
  'a file that is not in the encoding chosen': { file: latin1('t,d µm\n1.7,0.43\n'), status: 422, says: 'not written in utf-8' },
  'a bad byte far behind the beginning': { file: Buffer.concat([Buffer.from(`t,d\n${'1.7,0.43\n'.repeat(20_000)}`), Buffer.from([0xff])]), status: 422, says: 'not written in utf-8' },
  'a character cut off by the end of the file': { file: Buffer.from('t,d\n1.7,0.43µ').subarray(0, -1), status: 422, says: 'not written in utf-8' },
  'a mark that contradicts the mapping': { file: `\uFEFF${good}`, mapping: { ...plainImportMapping, encoding: 'windows-1252' }, status: 422, says: 'says that it is written in utf-8' },
  'UTF-16 of an odd length': { file: utf16(good, true, '\uFEFF').slice(0, -1), mapping: { ...plainImportMapping, encoding: 'utf-16le' }, status: 422, says: 'not written in utf-16le' },
  'a quotation mark that is never closed': { file: 't,d\n1.7,0.43\n"2,0.5\n3,0.6\n', status: 422, says: 'line 3' },
  'a quotation mark that swallows a large file': { file: `t,d\n1.7,"0.43\n${'2,0.5\n'.repeat(300_000)}`, status: 422, says: 'line 2' },
  'a mapping that points past the last column': { file: good, mapping: { ...plainImportMapping, depth: { column: 300, unit: 'mm' } }, status: 422, says: 'column 301, the file has 2' },
  'the wrong delimiter': { file: 't;d\n1.7;0.43\n', status: 422, says: 'the file has 1' },
  'one column for two meanings': { file: good, mapping: { ...plainImportMapping, depth: { column: 0, unit: 'mm' } }, status: 422, says: 'two meanings' },
  'an energy column in a study of seconds': { file: good, mapping: { ...plainImportMapping, exposure: { column: 0, unit: 'J/m2' } }, status: 422, says: 'counts exposure in seconds' },
  'a mapping that is no JSON': { file: good, mapping: '{', status: 422, says: 'not JSON' },
  'a mapping that is no object': { file: good, mapping: '[[[[1]]]]', status: 422, says: 'mapping' },
  'a mapping with a foreign key': { file: good, mapping: { ...plainImportMapping, shopId: v7() }, status: 422, says: 'mapping' },
  'a mapping that reaches for the prototype': { file: good, mapping: `{"__proto__":{"encoding":"utf-8"},${JSON.stringify(plainImportMapping).slice(1)}`, status: 422, says: 'mapping' },
  'a mapping column of 500': { file: good, mapping: { ...plainImportMapping, exposure: { column: 500, unit: 's' } }, status: 422, says: 'mapping' },
  'a mapping column of -1': { file: good, mapping: { ...plainImportMapping, exposure: { column: -1, unit: 's' } }, status: 422, says: 'mapping' },
  'a delimiter that is none': { file: good, mapping: { ...plainImportMapping, delimiter: '"' }, status: 422, says: 'mapping' },
  'a mapping of 4001 characters': { file: good, mapping: ' '.repeat(4001), status: 422, says: 'mapping' },
  'another media type': { file: good, status: 415, says: 'text/csv', headers: { 'Content-Type': 'text/plain' } },
  'a compressed transfer': { file: new Uint8Array(gzipSync(good)), status: 415, says: 'not compressed', headers: { ...csvHeaders, 'Content-Encoding': 'gzip' } },
}

describe('a file that cannot be imported is refused with what to do about it, and nothing is written', () => {
  it.each(Object.entries(refused))('%s', async (_name, { file, mapping, status, says, headers }) => {
    const response = await put(file, mapping, headers)
    const problem = problemSchema.parse(await response.json())
    expect(problem.status).toBe(status)
    expect(problem.detail).toContain(says)
    expect(await readings()).toEqual([])
    expect(await (await technician.send('GET', `${path}/film-imports`)).json()).toEqual({ items: [] })
  })
})

describe('a file that is too large', () => {
  const endless = (line: string, linesMax: number) => {
    let sent = 0
    return new ReadableStream<Uint8Array>({
      pull(controller) {
        if (sent === 0) controller.enqueue(Buffer.from('t,d\n'))
        if (sent >= linesMax) return controller.close()
        controller.enqueue(Buffer.from(line.repeat(5000)))
        sent += 5000
      },
    })
  }

  it(`takes ${importRowsMax} rows and refuses the next one`, async () => {
    const rows = '1.7,0.43\n'.repeat(100_000) + '2.7,0.43\n'.repeat(importRowsMax - 100_000 - 1)
    const tooMany = await put(`t,d\n${rows}3,0.5\n4,0.5\n`)
    expect(problemSchema.parse(await tooMany.json()).detail).toContain(`more than ${importRowsMax} rows`)
    // One exposure holds 100000 films at most: this file reaches that once.
    const most = await put(`t,d\n${rows}2.7x,0.5\n`)
    const answer = importFilmReadings.response?.parse(await most.json())
    expect(answer?.batch).toMatchObject({ acceptedRows: importRowsMax - 1, rejectedRows: 1 })
  })

  it('refuses more films of one exposure than the grid can hold', async () => {
    const response = await put(`t,d\n${'1.7,0.43\n'.repeat(100_001)}`)
    expect(problemSchema.parse(await response.json()).detail).toContain('more than 100000 films')
  })

  it('refuses a million rows without holding them', async () => {
    global.gc?.()
    const before = process.memoryUsage().rss
    const response = await put(endless('1.7,0.43\n', 1_000_000))
    expect(problemSchema.parse(await response.json())).toMatchObject({ status: 422, detail: expect.stringContaining('Split it') })
    expect(process.memoryUsage().rss - before).toBeLessThan(400_000_000)
  })

  it('refuses more bytes than allowed, announced or not', async () => {
    const announced = await put(new Uint8Array(importBytesMax + 1).fill(0x20))
    expect(problemSchema.parse(await announced.json())).toMatchObject({ status: 413 })
    // Few rows, endless blanks.
    const streamed = await put(endless(`${' '.repeat(600)}\n`, 200_000))
    expect(problemSchema.parse(await streamed.json())).toMatchObject({ status: 413, detail: expect.stringContaining('50 MB') })
    expect(await readings()).toEqual([])
  })
})
