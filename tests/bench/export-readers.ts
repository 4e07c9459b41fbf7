/**
 * Whether R and pandas, where they are installed, read our exports as they are:
 * `TEST_DATABASE_URL=… node --import tsx tests/bench/export-readers.ts`. No measurement and no part of the tests, because a
 * fresh machine has neither.
 */
import { spawnSync } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { cell, startFilmShop } from '#tests/helpers/film-shop.ts'

const awkward = [
  cell({ depthMicrometres: 430.123_456_789, note: '=1+1, "quoted"\nsecond line' }),
  cell({ replicate: 2, depthMicrometres: -3.5, note: 'it\'s 5 µm; #3' }),
  cell({ exposure: 2.1, state: 'no-film', depthMicrometres: null, depthText: '' }),
  cell({ exposure: 1e-7, depthMicrometres: 1e-7 }),
]
/** What both must print: rows, and the sums of two columns to 12 digits. */
const expected = '4 5.5000001 426.6234568890'

const readers = [
  { name: 'R read.csv', program: 'Rscript', script: 'd <- read.csv(commandArgs(TRUE)[1]); cat(nrow(d), format(sum(d$exposure_seconds), digits = 8), sprintf("%.10f", sum(d$depth_micrometres, na.rm = TRUE)))' },
  { name: 'pandas read_csv', program: 'python3', script: 'import pandas, sys; d = pandas.read_csv(sys.argv[1]); print(len(d), "%.8g" % d.exposure_seconds.sum(), "%.10f" % d.depth_micrometres.sum(), end="")' },
] as const

const folder = mkdtempSync(join(tmpdir(), 'fanlight-export-readers-'))
const shop = await startFilmShop()
try {
  const ids = await shop.makeShop()
  const engineer = await shop.signIn(ids.shopId, 'engineer', 'Édo')
  const study = await shop.makeStudy(ids)
  await engineer.send('POST', `${study.path}/film-readings/save`, { body: { readings: awkward } })
  const file = join(folder, 'readings.csv')
  writeFileSync(file, await (await engineer.send('GET', `${study.path}/film-readings.csv`)).text())
  for (const { name, program, script } of readers) {
    const { stdout, status, error } = spawnSync(program, [program === 'Rscript' ? '-e' : '-c', script, file], { encoding: 'utf8' })
    const verdict = error !== undefined || status !== 0 ? 'not installed here' : stdout === expected ? 'reads it' : `READS SOMETHING ELSE: ${stdout}, not ${expected}`
    process.stdout.write(`${name}: ${verdict}\n`)
    if (verdict.startsWith('READS')) process.exitCode = 1
  }
} finally {
  rmSync(folder, { recursive: true, force: true })
  await shop.close()
}
