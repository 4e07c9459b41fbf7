import { v7 } from 'uuid'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { eq } from 'drizzle-orm'
import { study } from '#db/schema/index.ts'
import { getFilmReadingHistory, listFilmReadings, saveFilmReadings, type FilmReadingSave } from '#shared/contracts/film.ts'
import { problemSchema } from '#shared/contracts/error.ts'
import { cell, startFilmShop, type FilmClient, type FilmShop } from '#tests/helpers/film-shop.ts'

let shop: FilmShop
let technician: FilmClient
let engineer: FilmClient
let ids: Awaited<ReturnType<FilmShop['makeShop']>>
let path: string
let studyId: string

beforeAll(async () => {
  shop = await startFilmShop()
  ids = await shop.makeShop()
  technician = await shop.signIn(ids.shopId, 'technician', 'Tea Technician')
  engineer = await shop.signIn(ids.shopId, 'engineer', 'Edo Engineer')
})
beforeEach(async () => {
  ({ path, studyId } = await shop.makeStudy(ids))
})
afterAll(() => shop.close())

async function save(client: FilmClient, ...readings: readonly FilmReadingSave[]) {
  const response = await client.send('POST', `${path}/film-readings/save`, { body: { readings } })
  expect(response.status).toBe(200)
  return saveFilmReadings.response?.parse(await response.json()) ?? { results: [], readingsRevision: -1 }
}
async function list(query = '') {
  const response = await engineer.send('GET', `${path}/film-readings${query}`)
  expect(response.status).toBe(200)
  return listFilmReadings.response?.parse(await response.json()) ?? { items: [], nextCursor: null, total: -1, readingsRevision: -1 }
}
const kinds = (answer: { results: readonly { kind: string }[] }) => answer.results.map(result => result.kind)

describe('saving cells of the entry grid', () => {
  it('answers each new cell with its reading, who entered it and version 1', async () => {
    const first = cell()
    const { results, readingsRevision } = await save(technician, first, cell({ exposure: 2.1, state: 'no-film', depthMicrometres: null, depthText: '' }))
    expect(results[0]).toMatchObject({ kind: 'saved', id: first.id, reading: { exposure: 1.7, depthMicrometres: 430, version: 1, enteredBy: 'Tea Technician', importBatchId: null } })
    expect(results[1]).toMatchObject({ kind: 'saved', reading: { state: 'no-film', depthMicrometres: null } })
    expect(readingsRevision).toBe(1)
    expect((await list()).items.map(item => item.exposure)).toEqual([1.7, 2.1])
  })

  it('keeps every digit of a number', async () => {
    const values = { exposure: 0.1 + 0.2, depthMicrometres: 123.456_789_012_345_67, standardUncertaintyMicrometres: 1e-7 }
    await save(technician, cell(values))
    expect((await list()).items[0]).toMatchObject(values)
  })

  it('gives the same answer to the same save sent again and changes nothing', async () => {
    const cells = [cell(), cell({ replicate: 2 })]
    const first = await save(technician, ...cells)
    expect(await save(technician, ...cells)).toEqual(first)
    const edit = { ...cells[0], ...cell({ id: cells[0]?.id ?? '', depthMicrometres: 440, baseVersion: 1 }) }
    const second = await save(technician, edit)
    expect(await save(technician, edit)).toEqual(second)
    expect((await list()).total).toBe(2)
  })

  it('raises the study revision once per save, and not for a save that changes nothing', async () => {
    const cells = Array.from({ length: 5 }, (_, i) => cell({ replicate: i + 1 }))
    expect((await save(technician, ...cells)).readingsRevision).toBe(1)
    expect((await save(technician, ...cells)).readingsRevision).toBe(1)
    expect((await save(technician, cell({ exposure: 9 }))).readingsRevision).toBe(2)
    expect((await list()).readingsRevision).toBe(2)
  })

  it('leaves the version of the study alone: an open edit of its settings stays good', async () => {
    await save(technician, cell())
    expect(await shop.db.select({ version: study.version }).from(study).where(eq(study.id, studyId))).toEqual([{ version: 1 }])
  })

  it('answers an edit on an old version with what stands there, and saves the others', async () => {
    const mine = cell()
    await save(technician, mine)
    await save(engineer, { ...mine, depthMicrometres: 500, depthText: '0.5', baseVersion: 1 })
    const { results } = await save(technician, { ...mine, depthMicrometres: 450, baseVersion: 1 }, cell({ replicate: 2 }))
    expect(results[0]).toMatchObject({ kind: 'stale', id: mine.id, current: { depthMicrometres: 500, version: 2 }, currentVersion: 2 })
    expect(results[1]).toMatchObject({ kind: 'saved' })
    expect((await list()).items.map(item => item.depthMicrometres)).toEqual([500, 430])
  })

  it('answers a cell that somebody else filled with the other reading', async () => {
    const theirs = cell({ depthMicrometres: 111 })
    await save(engineer, theirs)
    const mine = cell({ depthMicrometres: 222 })
    expect((await save(technician, mine)).results[0]).toMatchObject({ kind: 'stale', id: mine.id, current: { id: theirs.id, depthMicrometres: 111 } })
    expect((await list()).total).toBe(1)
  })

  it('lets the first of two cells in one save win a place', async () => {
    const [a, b] = [cell({ depthMicrometres: 1 }), cell({ depthMicrometres: 2 })]
    const { results } = await save(technician, a, b)
    expect(results).toMatchObject([{ kind: 'saved' }, { kind: 'stale', id: b.id, current: { id: a.id } }])
  })

  it('lets two readings change places, and a new one take a place that is left', async () => {
    const [a, b] = [cell({ depthMicrometres: 1 }), cell({ depthMicrometres: 2, replicate: 2 })]
    await save(technician, a, b)
    expect(kinds(await save(technician, { ...a, replicate: 2, baseVersion: 1 }, { ...b, replicate: 1, baseVersion: 1 }))).toEqual(['saved', 'saved'])
    expect((await list()).items.map(item => item.id)).toEqual([b.id, a.id])
    const c = cell({ depthMicrometres: 3 })
    expect(kinds(await save(technician, c, { ...b, replicate: 3, baseVersion: 2 }))).toEqual(['saved', 'saved'])
    expect((await list()).items.map(item => item.id)).toEqual([c.id, a.id, b.id])
  })

  it('refuses a whole chain of moves when its end is taken', async () => {
    const readings = [1, 2, 3].map(replicate => cell({ replicate, depthMicrometres: replicate }))
    const wall = cell({ replicate: 4, depthMicrometres: 4 })
    await save(engineer, ...readings, wall)
    const moved = readings.map((reading, i) => ({ ...reading, replicate: i + 2, baseVersion: 1 }))
    expect(kinds(await save(technician, ...moved))).toEqual(['stale', 'stale', 'stale'])
    expect((await list()).items.map(item => item.depthMicrometres)).toEqual([1, 2, 3, 4])
  })

  it('withdraws and restores, and does not restore into a place that was filled meanwhile', async () => {
    const reading = cell()
    await save(technician, reading)
    expect(await save(technician, { ...reading, withdrawn: true, baseVersion: 1 })).toMatchObject({ results: [{ kind: 'withdrawn', id: reading.id, version: 2 }] })
    expect((await list()).total).toBe(0)
    expect(kinds(await save(technician, { ...reading, withdrawn: false, baseVersion: 2 }))).toEqual(['saved'])
    await save(technician, { ...reading, withdrawn: true, baseVersion: 3 })
    const other = cell({ depthMicrometres: 99 })
    await save(engineer, other)
    expect((await save(technician, { ...reading, withdrawn: false, baseVersion: 4 })).results).toMatchObject([{ kind: 'stale', current: { id: other.id } }])
  })

  it('says that a reading edited here was withdrawn elsewhere', async () => {
    const reading = cell()
    await save(technician, reading)
    await save(engineer, { ...reading, withdrawn: true, baseVersion: 1 })
    expect((await save(technician, { ...reading, depthMicrometres: 5, baseVersion: 1 })).results).toEqual([{ kind: 'stale', id: reading.id, current: null, currentVersion: 2 }])
  })

  it('takes the second change of a new cell whose first answer was lost', async () => {
    const reading = cell()
    await save(technician, reading)
    expect((await save(technician, { ...reading, depthMicrometres: 431 })).results).toMatchObject([{ kind: 'saved', reading: { version: 2, depthMicrometres: 431 } }])
    // Somebody else has the same id and base: that is not a lost answer.
    expect(kinds(await save(engineer, { ...reading, depthMicrometres: 432 }))).toEqual(['stale'])
  })

  it('takes two changes of one reading in one save in their order', async () => {
    const reading = cell()
    const { results } = await save(technician, reading, { ...reading, depthMicrometres: 2, baseVersion: 1 }, { ...reading, depthMicrometres: 3, baseVersion: 1 })
    expect(results).toMatchObject([{ kind: 'saved', reading: { version: 1 } }, { kind: 'saved', reading: { version: 2, depthMicrometres: 2 } }, { kind: 'stale', current: { depthMicrometres: 2 } }])
  })

  it('does not touch a reading of another study or shop whose id is sent', async () => {
    const foreign = cell()
    await save(technician, foreign)
    const otherShop = await shop.makeShop()
    const otherStudy = await shop.makeStudy(otherShop)
    const stranger = await shop.signIn(otherShop.shopId, 'owner')
    for (const baseVersion of [null, 1]) {
      const answer = await stranger.send('POST', `${otherStudy.path}/film-readings/save`, { body: { readings: [{ ...foreign, depthMicrometres: 1, baseVersion }] } })
      expect(await answer.json()).toMatchObject({ results: [{ kind: 'stale', id: foreign.id, current: null, currentVersion: 0 }] })
    }
    expect((await stranger.send('POST', `${path}/film-readings/save`, { body: { readings: [cell()] } })).status).toBe(404)
    expect((await list()).items).toMatchObject([{ id: foreign.id, depthMicrometres: 430, version: 1 }])
  })

  it('takes ids in capitals as the ids they are', async () => {
    const reading = cell()
    await save(technician, { ...reading, id: reading.id.toUpperCase() })
    expect((await save(technician, { ...reading, depthMicrometres: 9, baseVersion: 1 })).results).toMatchObject([{ kind: 'saved', id: reading.id }])
  })

  it.each([
    ['a measured cell without thickness', { depthMicrometres: null }],
    ['an excluded cell without reason', { state: 'excluded' as const }],
    ['exposure 0', { exposure: 0 }],
    ['a thickness beyond 100 mm', { depthMicrometres: 100_001 }],
    ['a note of 401 characters', { note: 'n'.repeat(401) }],
    ['a zero byte', { note: 'a\0b' }],
    ['column 0', { replicate: 0 }],
  ])('refuses %s and saves nothing of the request', async (_name, changes) => {
    const response = await technician.send('POST', `${path}/film-readings/save`, { body: { readings: [cell({ exposure: 5 }), cell(changes)] } })
    expect(problemSchema.parse(await response.json())).toMatchObject({ status: 422, code: 'validation-failed' })
    expect((await list()).total).toBe(0)
  })

  it('takes 2000 cells, refuses 2001', async () => {
    const cells = Array.from({ length: 2001 }, (_, i) => cell({ exposure: 1 + Math.floor(i / 50), replicate: (i % 50) + 1 }))
    const tooMany = await technician.send('POST', `${path}/film-readings/save`, { body: { readings: cells } })
    expect(tooMany.status).toBe(422)
    expect((await save(technician, ...cells.slice(0, 2000))).results).toHaveLength(2000)
    const edited = cells.slice(0, 2000).map(reading => ({ ...reading, depthMicrometres: 7, baseVersion: 1 }))
    expect(new Set(kinds(await save(technician, ...edited)))).toEqual(new Set(['saved']))
  })

  it('refuses a retired study', async () => {
    await shop.db.update(study).set({ retiredAt: new Date() }).where(eq(study.id, studyId))
    expect((await technician.send('POST', `${path}/film-readings/save`, { body: { readings: [cell()] } })).status).toBe(409)
  })

  it('refuses a viewer', async () => {
    const viewer = await shop.signIn(ids.shopId, 'viewer')
    expect((await viewer.send('POST', `${path}/film-readings/save`, { body: { readings: [cell()] } })).status).toBe(403)
    expect((await viewer.send('GET', `${path}/film-readings`)).status).toBe(200)
  })
})

describe('two people saving at once', () => {
  it('never deadlock, lose nothing and agree on every cell, whatever the order of their cells', async () => {
    const readings = Array.from({ length: 60 }, (_, i) => cell({ exposure: 1 + Math.floor(i / 6), replicate: (i % 6) + 1, depthMicrometres: 1 }))
    await save(technician, ...readings)
    const edits = (client: FilmClient, depthMicrometres: number, order: readonly FilmReadingSave[]) =>
      save(client, ...order.map(reading => ({ ...reading, depthMicrometres, baseVersion: 1 })))
    for (let round = 0; round < 5; round++) {
      const fresh = readings.map(reading => ({ ...cell(), exposure: reading.exposure + 100 * (round + 1), replicate: reading.replicate }))
      const answers = await Promise.all([
        edits(technician, 2, readings), edits(engineer, 3, readings.toReversed()),
        save(technician, ...fresh), save(engineer, ...fresh.map(reading => ({ ...reading, id: v7(), depthMicrometres: 5 })).toReversed()),
      ])
      // Of two that fill the same cells one wins, whole; the other gets the winner's readings.
      expect(new Set([...new Set(kinds(answers[2])), ...new Set(kinds(answers[3]))])).toEqual(new Set(['saved', 'stale']))
      expect(answers.flatMap(answer => answer.results)).toHaveLength(240)
    }
    const { items, total } = await list()
    expect(total).toBe(60 + 5 * 60)
    const first = items.filter(item => item.exposure < 100)
    expect(new Set(first.map(item => item.version))).toEqual(new Set([2]))
    expect(new Set(first.map(item => item.depthMicrometres)).size).toBe(1)
  })
})

describe('the list', () => {
  it('comes in pages by exposure and column, without gap or repeat', async () => {
    const cells = [3, 1, 2].flatMap(exposure => [2, 1, 3].map(replicate => cell({ exposure, replicate })))
    await save(technician, ...cells)
    const seen: string[] = []
    let cursor: string | null = ''
    while (cursor !== null) {
      const page: Awaited<ReturnType<typeof list>> = await list(`?limit=2${cursor === '' ? '' : `&cursor=${cursor}`}`)
      seen.push(...page.items.map(item => `${item.exposure}/${item.replicate}`))
      expect(page.total).toBe(9)
      cursor = page.nextCursor
    }
    expect(seen).toEqual(['1/1', '1/2', '1/3', '2/1', '2/2', '2/3', '3/1', '3/2', '3/3'])
  })

  it.each(['x', 'bnVsbA', 'W10'])('refuses the cursor %s', async cursor => {
    expect((await engineer.send('GET', `${path}/film-readings?cursor=${cursor}`)).status).toBe(400)
  })

  it('takes a page of 10000, refuses 10001', async () => {
    expect((await engineer.send('GET', `${path}/film-readings?limit=10000`)).status).toBe(200)
    expect((await engineer.send('GET', `${path}/film-readings?limit=10001`)).status).toBe(422)
  })

  it('is not found for a study of another shop', async () => {
    const other = await shop.makeStudy(await shop.makeShop())
    expect((await engineer.send('GET', `/api/shops/${ids.shopId}/studies/${other.studyId}/film-readings`)).status).toBe(404)
  })
})

describe('the history of a reading', () => {
  it('keeps each former value with who changed it, newest first', async () => {
    const reading = cell({ note: 'first' })
    await save(technician, reading)
    await save(engineer, { ...reading, depthMicrometres: 440, depthText: '0.44', note: 'second', baseVersion: 1 })
    await save(technician, { ...reading, depthMicrometres: 440, depthText: '0.44', note: 'second', withdrawn: true, baseVersion: 2 })
    const response = await engineer.send('GET', `${path}/film-readings/${reading.id}/history`)
    expect(getFilmReadingHistory.response?.parse(await response.json())).toMatchObject({
      items: [
        { version: 2, before: { depthMicrometres: 440, depthText: '0.44', note: 'second', withdrawn: false }, changedBy: 'Tea Technician' },
        { version: 1, before: { depthMicrometres: 430, depthText: '0.43', note: 'first', withdrawn: false }, changedBy: 'Edo Engineer' },
      ],
    })
  })

  it('is not found for an unknown reading', async () => {
    expect((await engineer.send('GET', `${path}/film-readings/${v7()}/history`)).status).toBe(404)
  })
})
