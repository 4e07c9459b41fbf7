import { request as httpRequest } from 'node:http'
import Papa from 'papaparse'
import { v7 } from 'uuid'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import type { z } from 'zod'
import { eq } from 'drizzle-orm'
import { auditEvent, study } from '#db/schema/index.ts'
import { findImportMapping, importFilmReadings, listFilmImports, withdrawFilmImport } from '#shared/contracts/film-imports.ts'
import { listFilmReadings } from '#shared/contracts/film.ts'
import { cell, csvHeaders, importPath, plainImportMapping, startFilmShop, type FilmClient, type FilmShop } from '#tests/helpers/film-shop.ts'

let shop: FilmShop
let technician: FilmClient
let ids: Awaited<ReturnType<FilmShop['makeShop']>>
let path: string
let studyId: string

beforeAll(async () => {
  shop = await startFilmShop()
  ids = await shop.makeShop()
  technician = await shop.signIn(ids.shopId, 'technician', 'Tea Technician')
})
beforeEach(async () => {
  ({ path, studyId } = await shop.makeStudy(ids))
})
afterAll(() => shop.close())

const parsed = async <Schema extends z.ZodType>(schema: Schema | undefined, response: Response): Promise<z.output<Schema>> => {
  if (schema === undefined) throw new Error('the operation has no response')
  return schema.parse(await response.json())
}
async function put(text: string, { batchId = v7(), mapping = plainImportMapping as unknown, more = {} } = {}) {
  const response = await technician.send('PUT', importPath(path, batchId, mapping, more), { body: text, headers: csvHeaders })
  expect(response.status).toBe(201)
  return parsed(importFilmReadings.response, response)
}
const list = async () => parsed(listFilmReadings.response, await technician.send('GET', `${path}/film-readings`))
const places = async () => (await list()).items.map(item => `${item.exposure}/${item.replicate}=${item.depthMicrometres}`)
const change = async (batchId: string, verb: 'withdraw' | 'restore') =>
  parsed(withdrawFilmImport.response, await technician.send('POST', `${path}/film-imports/${batchId}/${verb}`))
const save = (readings: readonly unknown[]) => technician.send('POST', `${path}/film-readings/save`, { body: { readings } })

const small = 't,d\n1.7,0.43\n2.1,0.51\n1.7,0.44\n'

describe('importing a file', () => {
  it('numbers the films of each exposure in the order of the file, after those that are there', async () => {
    await save([cell({ replicate: 4, depthMicrometres: 400 })])
    const { batch, rejected, alreadyImported, readingsRevision } = await put(small)
    expect(batch).toMatchObject({ fileName: 'films.csv', acceptedRows: 3, rejectedRows: 0, importedBy: 'Tea Technician', withdrawnAt: null })
    expect({ rejected, alreadyImported, readingsRevision }).toEqual({ rejected: [], alreadyImported: false, readingsRevision: 2 })
    expect(await places()).toEqual(['1.7/4=400', '1.7/5=430', '1.7/6=440', '2.1/1=510'])
    expect((await list()).items[1]).toMatchObject({ exposureText: '1.7 s', depthText: '0.43 mm', importBatchId: batch.id, enteredBy: 'Tea Technician', version: 1 })
  })

  it('orders the films of an exposure by their film number where a column has it', async () => {
    await put('film,t,d\n3,1.7,0.43\n1,1.7,0.41\n,1.7,0.49\n2,1.7,0.42\n10,1.7,0.45\n', { mapping: { ...plainImportMapping, exposure: { column: 1, unit: 's' }, depth: { column: 2, unit: 'mm' }, replicate: { column: 0 } } })
    expect(await places()).toEqual(['1.7/1=410', '1.7/2=420', '1.7/3=430', '1.7/4=450', '1.7/5=490'])
  })

  it('takes the good rows and answers the bad ones with line and reasons', async () => {
    const { batch, rejected } = await put('t,d\n1.7,0.43\nabc,0.5\n\n2.1,\n3.0,0.6\n')
    expect(batch).toMatchObject({ acceptedRows: 2, rejectedRows: 2 })
    expect(rejected).toEqual([
      { line: 3, cells: ['abc', '0.5'], reasons: ['Exposure: the cell is “abc”, which is not a number.'] },
      { line: 5, cells: ['2.1', ''], reasons: ['Thickness: the cell is empty; write the thickness, or a state such as “no film”.'] },
    ])
  })

  it('keeps units, states, notes, uncertainties and the substrate', async () => {
    await put('Zeit [ms];Dicke (µm);Zustand;u;Bemerkung\n1.700,5;1030;;3,5;"zwei\nZeilen; Semikolon"\n2100;kein Film;;;\n2500;;verloren;;im Bad\n', {
      mapping: {
        encoding: 'utf-8', delimiter: ';', decimalMark: ',', headerRows: 1, exposure: { column: 0, unit: 'ms' }, depth: { column: 1, unit: 'um' },
        state: { column: 2 }, uncertainty: { column: 3, unit: 'um' }, replicate: null, note: { column: 4 }, substrateThicknessMicrometres: 1000,
      },
    })
    expect((await list()).items).toMatchObject([
      { exposure: 1.7005, exposureText: '1.700,5 ms', depthMicrometres: 30, depthText: '1030 µm', standardUncertaintyMicrometres: 3.5, note: 'zwei\nZeilen; Semikolon', state: 'measured' },
      { exposure: 2.1, depthMicrometres: null, depthText: 'kein Film', state: 'no-film' },
      { exposure: 2.5, depthMicrometres: null, state: 'lost-in-wash', note: 'im Bad' },
    ])
  })

  it('keeps texts that COPY could take for its own signs', async () => {
    const note = 'back\\slash \\N \\. tab\tand "quotes"'
    await put(`t,d,n\n1.7,0.43,"${note.replaceAll('"', '""')}"\n`, { mapping: { ...plainImportMapping, note: { column: 2 } } })
    expect((await list()).items[0]?.note).toBe(note)
  })

  it('answers the same batch again as it was and changes nothing', async () => {
    const batchId = v7()
    const first = await put(`${small}x,1\n`, { batchId })
    const second = await put('t,d\n9,9\n', { batchId })
    expect(second).toEqual({ ...first, alreadyImported: true })
    expect((await list()).total).toBe(3)
  })

  it('imports once when the same batch arrives twice at the same moment', async () => {
    const batchId = v7()
    const answers = await Promise.all(Array.from({ length: 4 }, () => put(small, { batchId })))
    expect(answers.filter(answer => !answer.alreadyImported)).toHaveLength(1)
    expect((await list()).total).toBe(3)
  })

  it('imports different batches at the same moment side by side without a lost or doubled cell', async () => {
    await Promise.all(Array.from({ length: 4 }, () => put(small)))
    expect((await places()).map(place => place.split('=')[0])).toEqual([...Array.from({ length: 8 }, (_, i) => `1.7/${i + 1}`), ...Array.from({ length: 4 }, (_, i) => `2.1/${i + 1}`)])
  })

  it('refuses a batch id that another study uses', async () => {
    const batchId = v7()
    await put(small, { batchId })
    const other = await shop.makeStudy(ids)
    const response = await technician.send('PUT', importPath(other.path, batchId), { body: small, headers: csvHeaders })
    expect(response.status).toBe(409)
  })

  it('imports 20000 rows in one batch', async () => {
    const rows = Array.from({ length: 20_000 }, (_, i) => `${1 + (i % 50) / 10},${(0.1 + (i % 97) / 1000).toFixed(3)}`)
    const { batch } = await put(`t,d\n${rows.join('\n')}\n`)
    expect(batch.acceptedRows).toBe(20_000)
    expect((await list()).total).toBe(20_000)
  })

  it('does not slow down the saving of 2000 cells beside it: 5 s are plenty, a walk over all rows per cell takes 20', async () => {
    await put(`t,d\n${Array.from({ length: 40_000 }, (_, i) => `${1 + (i % 50) / 10},0.1`).join('\n')}\n`)
    const cells = Array.from({ length: 2000 }, (_, i) => cell({ exposure: 100 + Math.floor(i / 10), replicate: (i % 10) + 1 }))
    await save(cells)
    const start = performance.now()
    const response = await save(cells.map(reading => ({ ...reading, depthMicrometres: 7, baseVersion: 1 })))
    expect(response.status).toBe(200)
    expect(performance.now() - start).toBeLessThan(5000)
  })

  it('leaves nothing behind when the upload breaks off', async () => {
    const batchId = v7()
    await new Promise<void>(resolve => {
      const sending = httpRequest(`${shop.baseUrl}${importPath(path, batchId)}`, { method: 'PUT', headers: { ...csvHeaders, ...technician.headers, 'Content-Length': 1_000_000 } })
      sending.on('error', () => resolve())
      sending.write(small)
      setTimeout(() => sending.destroy(new Error('broken off')), 100)
    })
    await new Promise(resolve => setTimeout(resolve, 200))
    expect((await list()).total).toBe(0)
    expect((await parsed(listFilmImports.response, await technician.send('GET', `${path}/film-imports`))).items).toEqual([])
    // The same batch can be sent again and goes in.
    expect(await put(small, { batchId })).toMatchObject({ alreadyImported: false, batch: { acceptedRows: 3 } })
  })

  it('refuses a retired study and an unknown one', async () => {
    await shop.db.update(study).set({ retiredAt: new Date() }).where(eq(study.id, studyId))
    expect((await technician.send('PUT', importPath(path, v7()), { body: small, headers: csvHeaders })).status).toBe(409)
    expect((await technician.send('PUT', importPath(path.replace(studyId, v7()), v7()), { body: small, headers: csvHeaders })).status).toBe(404)
  })
})

describe('the rejected rows as CSV', () => {
  const mapping = { ...plainImportMapping, delimiter: ';', decimalMark: ',', note: { column: 2 } }
  const text = 't;d;n\n1,7;0,43;fine\nabc;0,5;=1+1\n2,1;;"a;b ""c"""\n'

  it('keep the columns, the delimiter and the cells, with line and reasons behind', async () => {
    const { batch } = await put(text, { mapping })
    const response = await technician.send('GET', `${path}/film-imports/${batch.id}/rejected.csv`)
    expect(response.headers.get('Content-Type')).toMatch(/^text\/csv/)
    expect(response.headers.get('Content-Disposition')).toContain('rejected rows of films.csv')
    const rows = Papa.parse<string[]>((await response.text()).trim(), { delimiter: ';' }).data
    expect(rows).toEqual([
      ['t', 'd', 'n', 'line', 'why_rejected'],
      ['abc', '0,5', "'=1+1", '3', 'Exposure: the cell is “abc”, which is not a number.'],
      ['2,1', '', 'a;b "c"', '4', 'Thickness: the cell is empty; write the thickness, or a state such as “no film”.'],
    ])
  })

  it('can be mended and imported with the mapping that is remembered for them', async () => {
    const { batch } = await put(text, { mapping })
    const csv = await (await technician.send('GET', `${path}/film-imports/${batch.id}/rejected.csv`)).text()
    const header = Papa.parse<string[]>(csv, { delimiter: ';' }).data[0]
    const found = await parsed(findImportMapping.response, await technician.send('POST', `/api/shops/${ids.shopId}/import-mappings/find`, { body: { header } }))
    const again = await put(csv.replace('abc', '1,9').replace('2,1;;', '2,1;0,5;'), { mapping: found.mapping })
    expect(again).toMatchObject({ batch: { acceptedRows: 2, rejectedRows: 0 } })
    expect((await list()).items.map(item => item.note)).toEqual(['fine', '=1+1', 'a;b "c"'])
  })

  it('are counted whole, kept to 10000, and say how many are missing', async () => {
    const { batch, rejected } = await put(`t,d\n1.7,0.43\n${'x,1\n'.repeat(10_050)}`)
    expect(batch).toMatchObject({ acceptedRows: 1, rejectedRows: 10_050 })
    expect(rejected).toHaveLength(10_000)
    const csv = await (await technician.send('GET', `${path}/film-imports/${batch.id}/rejected.csv`)).text()
    expect(csv.trim().split('\r\n').at(-1)).toContain('50 more rejected rows are not kept')
  })

  it('are not found in another study', async () => {
    const { batch } = await put(text, { mapping })
    const other = await shop.makeStudy(ids)
    expect((await technician.send('GET', `${other.path}/film-imports/${batch.id}/rejected.csv`)).status).toBe(404)
  })
})

describe('withdrawing and restoring an import', () => {
  it('takes out every reading of it and no other, and brings them back', async () => {
    await save([cell({ exposure: 5 })])
    const { batch } = await put(small)
    const before = await places()
    const withdrawn = await change(batch.id, 'withdraw')
    expect(withdrawn.batch.withdrawnAt).not.toBeNull()
    expect(withdrawn.readingsRevision).toBe(3)
    expect(await places()).toEqual(['5/1=430'])
    const restored = await change(batch.id, 'restore')
    expect(restored.batch.withdrawnAt).toBeNull()
    expect(await places()).toEqual(before)
  })

  it('does nothing the second time', async () => {
    const { batch } = await put(small)
    const first = await change(batch.id, 'withdraw')
    expect(await change(batch.id, 'withdraw')).toEqual(first)
    const back = await change(batch.id, 'restore')
    expect(await change(batch.id, 'restore')).toEqual(back)
  })

  it('moves a restored reading behind the last one where its place was filled meanwhile', async () => {
    const { batch } = await put('t,d\n1.7,0.1\n1.7,0.2\n1.7,0.3\n2.1,0.4\n')
    await change(batch.id, 'withdraw')
    await save([cell({ replicate: 1, depthMicrometres: 900 }), cell({ replicate: 2, depthMicrometres: 901 })])
    await change(batch.id, 'restore')
    expect(await places()).toEqual(['1.7/1=900', '1.7/2=901', '1.7/3=300', '1.7/4=100', '1.7/5=200', '2.1/1=400'])
  })

  it('leaves withdrawn what a person withdrew by hand before', async () => {
    const { batch } = await put(small)
    const [first] = (await list()).items
    if (first === undefined) throw new Error('nothing was imported')
    const { id, exposure, exposureText, replicate, depthMicrometres, depthText, version } = first
    await save([cell({ id, exposure, exposureText, replicate, depthMicrometres, depthText, withdrawn: true, baseVersion: version })])
    await change(batch.id, 'withdraw')
    await change(batch.id, 'restore')
    expect(await places()).toEqual(['1.7/2=440', '2.1/1=510'])
  })

  it('keeps the former values in each reading’s history', async () => {
    const { batch } = await put(small)
    const [first] = (await list()).items
    await change(batch.id, 'withdraw')
    await change(batch.id, 'restore')
    const response = await technician.send('GET', `${path}/film-readings/${first?.id}/history`)
    expect(await response.json()).toMatchObject({ items: [{ version: 2, before: { withdrawn: true } }, { version: 1, before: { withdrawn: false } }] })
  })

  it('is not found in another study or shop', async () => {
    const { batch } = await put(small)
    const other = await shop.makeStudy(ids)
    expect((await technician.send('POST', `${other.path}/film-imports/${batch.id}/withdraw`)).status).toBe(404)
    expect((await list()).total).toBe(3)
  })

  it('never deadlocks with people saving cells', async () => {
    const { batch } = await put(small)
    const saves = Array.from({ length: 10 }, (_, i) => save([cell({ exposure: 20 + i }), cell({ exposure: 1.7, replicate: 50 + i })]))
    const changes = Array.from({ length: 5 }, async () => {
      await change(batch.id, 'withdraw')
      await change(batch.id, 'restore')
    })
    expect((await Promise.all(saves)).map(response => response.status)).toEqual(Array.from({ length: 10 }, () => 200))
    await Promise.all(changes)
    expect((await list()).total).toBe(23)
  })
})

describe('the mapping of a header', () => {
  const find = async (header: readonly string[], client = technician, shopId = ids.shopId) =>
    (await parsed(findImportMapping.response, await client.send('POST', `/api/shops/${shopId}/import-mappings/find`, { body: { header } }))).mapping

  it('is remembered for the shop under the header, whatever its case and spacing', async () => {
    expect(await find(['Seconds here', 'Millimetres here'])).toBeNull()
    await put('Seconds here,Millimetres here\n1.7,0.43\n')
    expect(await find(['seconds  HERE', 'millimetres here'])).toEqual(plainImportMapping)
  })

  it('is the latest that was chosen', async () => {
    await put('a1,b1\n1.7,430\n', { mapping: { ...plainImportMapping, depth: { column: 1, unit: 'um' } } })
    await put('a1,b1\n1.7,0.43\n')
    expect(await find(['a1', 'b1'])).toEqual(plainImportMapping)
  })

  it('is remembered for a header of several rows under its joined names', async () => {
    await put('Zeitreihe,Dickenreihe\n(s),(mm)\n1.7,0.43\n', { mapping: { ...plainImportMapping, headerRows: 2 } })
    expect(await find(['Zeitreihe (s)', 'Dickenreihe (mm)'])).toMatchObject({ headerRows: 2 })
  })

  it('is also remembered under the header that the client looked for', async () => {
    await put('a2,b2\n1.7,0.43\n', { more: { header: JSON.stringify(['what the', 'client saw']) } })
    expect(await find(['what the', 'client saw'])).toEqual(plainImportMapping)
  })

  it('stays inside the shop', async () => {
    await put('secret,header\n1.7,0.43\n')
    const other = await shop.makeShop()
    expect(await find(['secret', 'header'], await shop.signIn(other.shopId, 'owner'), other.shopId)).toBeNull()
  })
})

describe('the shop’s audit of imports', () => {
  it('has one line for the import, its withdrawal and its restoring, with who did it', async () => {
    const { batch } = await put(`${small}x,1\n`)
    await change(batch.id, 'withdraw')
    await change(batch.id, 'withdraw')
    await change(batch.id, 'restore')
    const events = await shop.db.select().from(auditEvent).where(eq(auditEvent.thingId, batch.id)).orderBy(auditEvent.at)
    expect(events.map(event => [event.action, event.actorUserId, event.after])).toEqual([
      ['imported', technician.userId, { studyId, fileName: 'films.csv', acceptedRows: 3, rejectedRows: 1 }],
      ['withdrawn', technician.userId, { studyId, readings: 3 }],
      ['restored', technician.userId, { studyId, readings: 3 }],
    ])
  })
})

describe('the list of imports', () => {
  it('has the newest first', async () => {
    const [first, second] = [await put(small), await put(small)]
    const { items } = await parsed(listFilmImports.response, await technician.send('GET', `${path}/film-imports`))
    expect(items).toEqual([second.batch, first.batch])
  })
})
