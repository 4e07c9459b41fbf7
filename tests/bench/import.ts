import { execFile } from 'node:child_process'
import { existsSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { promisify } from 'node:util'
import { v7 } from 'uuid'
import { importFilmReadings } from '#shared/contracts/film-imports.ts'
import { csvHeaders, importPath, startFilmShop, type FilmShop } from '#tests/helpers/film-shop.ts'
import type { BenchResult } from './types.ts'

const run = promisify(execFile)
const rows = 100_000
/** Runs of each; they take turns, so that a busy moment of the machine falls on both. */
const rounds = 5

/** The import may take this many times what the bare copy takes. */
const aim = 4

const exposureOf = (i: number) => (1 + (i % 200) / 10).toFixed(1)
const millimetresOf = (i: number) => (0.05 + (i % 977) / 1000).toFixed(3)

function findPsql(): string {
  const folder = '/usr/lib/postgresql'
  const versions = existsSync(folder) ? readdirSync(folder).sort((a, b) => Number(b) - Number(a)) : []
  return versions.map(version => join(folder, version, 'bin', 'psql')).find(existsSync) ?? 'psql'
}

/** The yardstick's table: same columns, constraints, indexes and foreign keys as the one we import into. */
async function makeYardstick(shop: FilmShop): Promise<void> {
  await shop.pool.query('create table yardstick (like film_reading including all)')
  const { rows: keys } = await shop.pool.query<{ definition: string }>(
    'select pg_get_constraintdef(oid) as definition from pg_constraint where conrelid = \'film_reading\'::regclass and contype = \'f\'')
  for (const { definition } of keys) await shop.pool.query(`alter table yardstick add ${definition}`)
}

/** Rows as the importing server would have made them: psql has nothing left to do but to copy. */
function finishedRows(study: { shopId: string; studyId: string }, batchId: string, userId: string): string {
  const replicates = new Map<string, number>()
  const now = new Date().toISOString()
  return Array.from({ length: rows }, (_, i) => {
    const exposure = exposureOf(i)
    const replicate = (replicates.get(exposure) ?? 0) + 1
    replicates.set(exposure, replicate)
    const depth = millimetresOf(i)
    return [v7(), study.shopId, study.studyId, exposure, exposure, replicate, Number(`${depth}e3`), depth, '', 'measured', '', '', batchId, 1, userId, now, now, ''].join(',')
  }).join('\n')
}

const median = (values: readonly number[]) => values.toSorted((a, b) => a - b)[Math.floor(values.length / 2)] ?? Number.NaN

/**
 * 100,000 readings through the HTTP API (decoded, parsed, checked, numbered, stored with their batch) against
 * `psql \copy` of the finished rows into a table with the same indexes and constraints, in the same run.
 */
export async function benchImport(): Promise<BenchResult> {
  const shop = await startFilmShop()
  const folder = mkdtempSync(join(tmpdir(), 'fanlight-bench-import-'))
  try {
    const ids = await shop.makeShop()
    const engineer = await shop.signIn(ids.shopId, 'engineer')
    await makeYardstick(shop)
    const file = `exposure (s),thickness (mm)\n${Array.from({ length: rows }, (_, i) => `${exposureOf(i)},${millimetresOf(i)}`).join('\n')}\n`
    const psql = findPsql()

    const importSeconds: number[] = []
    const copySeconds: number[] = []
    for (let round = 0; round < rounds; round++) {
      const study = await shop.makeStudy(ids)
      const batchId = v7()
      let start = performance.now()
      const response = await engineer.send('PUT', importPath(study.path, batchId), { body: file, headers: csvHeaders })
      const answer = importFilmReadings.response?.parse(await response.json())
      importSeconds.push((performance.now() - start) / 1000)
      if (answer?.batch.acceptedRows !== rows) throw new Error('the import did not take every row')

      const path = join(folder, 'rows.csv')
      writeFileSync(path, finishedRows(study, batchId, engineer.userId))
      start = performance.now()
      await run(psql, ['--no-psqlrc', '--quiet', shop.databaseUrl, '--command', `\\copy yardstick from '${path}' with (format csv, force_not_null (exposure_text, depth_text, note))`])
      copySeconds.push((performance.now() - start) / 1000)
    }
    const copied = await shop.pool.query<{ count: string }>('select count(*) from yardstick')
    if (Number(copied.rows[0]?.count) !== rows * rounds) throw new Error('psql did not copy every row')
    const ours = median(importSeconds)
    const yardstick = median(copySeconds)
    return { name: `import of ${rows} readings over HTTP, beside psql \\copy`, ours, yardstick, unit: 's', ratio: ours / yardstick, aim, higherIsBetter: false }
  } finally {
    rmSync(folder, { recursive: true, force: true })
    await shop.close()
  }
}
