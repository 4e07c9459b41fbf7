import { readFile } from 'node:fs/promises'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Page } from 'playwright-core'
import { longestTask, openStage, type Stage, type Visitor } from './helpers.ts'

let stage: Stage
let visitor: Visitor
let page: Page
let shopId: string

beforeAll(async () => {
  stage = await openStage()
  visitor = await stage.open()
  shopId = await visitor.signInAs('engineer')
  page = visitor.page
})
afterAll(() => stage.close())

/** A study without films in seconds: each test has one of its own. */
async function openNewStudy(name: string): Promise<string> {
  await visitor.goto(`/shop/${shopId}/studies/new`)
  await page.getByRole('combobox', { name: /^Printer/ }).selectOption({ label: 'North bench' })
  await page.getByRole('combobox', { name: /^Resin/ }).selectOption({ label: 'Model sand' })
  await page.getByLabel('Name', { exact: false }).last().fill(name)
  await page.getByRole('button', { name: 'Open the study' }).click()
  await page.waitForURL(/studies\/[0-9a-f-]{36}/)
  const studyId = /studies\/([0-9a-f-]{36})/.exec(page.url())?.[1] ?? ''
  await visitor.goto(`/shop/${shopId}/studies/${studyId}/film`)
  await page.getByRole('heading', { name: 'Import a CSV file' }).waitFor()
  return studyId
}

async function readingsOf(studyId: string): Promise<readonly string[]> {
  const { rows } = await stage.database.pool.query(
    'select exposure, replicate, depth_micrometres, state from film_reading where study_id = $1 and withdrawn_at is null order by exposure, replicate', [studyId])
  return rows.map(row => `${row.exposure}/${row.replicate}=${row.depth_micrometres ?? row.state}`)
}
const countOf = async (studyId: string) => (await readingsOf(studyId)).length

const choose = (name: string, text: string) => page.getByLabel('CSV file', { exact: true }).setInputFiles({ name, mimeType: 'text/csv', buffer: Buffer.from(text) })

describe('a CSV file with rows that are wrong', () => {
  // Semicolons, decimal commas and µm; lines 4 and 6 are wrong, line 7 is a film that did not form.
  const text = 'Exposure (s);Thickness (µm)\n2,4;61,5\n3,5;112\nsoon;120\n5;155,25\n6;\n1,1;no film\n'

  it('is told with line and reason before anything is stored; good rows go in, bad ones come back as CSV, and all of it can be withdrawn and restored', async () => {
    const studyId = await openNewStudy('Import with bad rows')
    await choose('wednesday.csv', text)
    await page.getByText('4 rows go in, 2 do not').waitFor()
    const understood = page.getByRole('region', { name: 'First rows as understood' })
    expect(await understood.getByRole('row').allTextContents()).toEqual(['LineExposureThicknessState', '22.40 s62 µmmeasured', '33.50 s112 µmmeasured', '55.00 s155 µmmeasured', '71.10 s—no film'])
    const rejected = page.getByRole('region', { name: 'Rejected rows' })
    expect(await rejected.getByRole('row', { name: /^4 / }).textContent()).toContain('“soon”, which is not a number')
    expect(await rejected.getByRole('row', { name: /^6 / }).textContent()).toContain('the cell is empty')
    expect(await readingsOf(studyId)).toEqual([])

    await page.getByRole('button', { name: 'Import 4 readings' }).click()
    await page.getByText('4 readings imported').waitFor()
    expect(await readingsOf(studyId)).toEqual(['1.1/1=no-film', '2.4/1=61.5', '3.5/1=112', '5/1=155.25'])
    await page.getByRole('textbox', { name: /^Film 1 at 2\.40 s/ }).waitFor()

    const download = page.waitForEvent('download')
    await page.getByRole('link', { name: 'Download them with the reasons' }).click()
    const returned = await readFile(await (await download).path(), 'utf8')
    expect(returned).toContain('soon')
    expect(returned).toMatch(/not a number/)
    expect(returned).not.toContain('61,5')

    await page.getByRole('button', { name: 'Withdraw wednesday.csv' }).click()
    await page.getByText('The readings of wednesday.csv are withdrawn.').waitFor()
    expect(await readingsOf(studyId)).toEqual([])
    await page.getByRole('button', { name: 'Undo' }).last().click()
    await page.getByText('The readings of wednesday.csv are back.').waitFor()
    expect(await countOf(studyId)).toBe(4)
  })

  it('is read again when a column gets another meaning, and the choice is remembered for the next file of that kind', async () => {
    const studyId = await openNewStudy('Import with another unit')
    await choose('first.csv', 't;d\n2,4;0,0615\n3,5;0,112\n')
    await page.getByLabel('Unit of the thicknesses').selectOption('um')
    await page.getByRole('region', { name: 'First rows as understood' }).getByText('0.1 µm').first().waitFor()
    await page.getByLabel('Unit of the thicknesses').selectOption('mm')
    await page.getByRole('region', { name: 'First rows as understood' }).getByText('62 µm').waitFor()
    await page.getByRole('button', { name: 'Import 2 readings' }).click()
    await page.getByText('2 readings imported').waitFor()
    expect(await readingsOf(studyId)).toEqual(['2.4/1=61.5', '3.5/1=112'])
    await choose('second.csv', 't;d\n4,5;0,13\n')
    await page.getByText('columns as chosen the last time for this header').waitFor()
    expect(await page.getByLabel('Unit of the thicknesses').inputValue()).toBe('mm')
    await page.getByRole('button', { name: 'Cancel' }).click()
  })

  it('that cannot be read at all is refused with a sentence, and nothing is stored', async () => {
    const studyId = await openNewStudy('Import of nothing')
    await choose('empty.csv', '')
    await page.getByText('This file cannot be imported as it is').waitFor()
    await page.getByText('The file is empty.').waitFor()
    expect(await readingsOf(studyId)).toEqual([])
  })
})

describe('a file of 100,000 rows', () => {
  it('is previewed, imported and drawn without the page standing still for 200 ms', async () => {
    const studyId = await openNewStudy('Import of 100,000')
    const rows = Array.from({ length: 100_000 }, (_, i) => {
      const exposure = 2 + (i % 250) * 0.1
      return `${exposure.toFixed(1)},${(120 * Math.log(exposure / 1.2) + ((i * 7919) % 13) - 6).toFixed(1)}`
    })
    const seconds: string[] = []
    const longest = await longestTask(stage, page, async () => {
      let start = performance.now()
      const lap = (what: string) => {
        seconds.push(`${what} ${((performance.now() - start) / 1000).toFixed(1)} s`)
        start = performance.now()
      }
      await choose('hundred-thousand.csv', `exposure s,thickness um\n${rows.join('\n')}\n`)
      await page.getByRole('button', { name: /^Import 100.000 readings$/ }).click({ timeout: 60_000 })
      lap('previewed after')
      await page.getByText(/100.000 readings imported/).waitFor({ timeout: 120_000 })
      lap('stored after another')
      await page.getByText(/100.000 readings at 250 exposures/).waitFor({ timeout: 60_000 })
      lap('shown after another')
    })
    process.stdout.write(`100,000 rows: ${seconds.join(', ')}; longest task of the page ${longest.cpuMilliseconds.toFixed(0)} ms of processor time, ${longest.wallMilliseconds.toFixed(0)} ms by the clock\n`)
    expect(await countOf(studyId)).toBe(100_000)
    expect(longest.cpuMilliseconds).toBeLessThan(200)
    expect(visitor.complaints).toEqual([])
  })
})
