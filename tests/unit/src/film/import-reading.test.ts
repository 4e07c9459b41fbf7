// @vitest-environment node
import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { openImportFile, previewImportFile, type ImportPreview } from '@/workers/import-reading.ts'

const blob = (text: string) => new Blob([text])
const mappingOf = async (file: Blob, kind: 'seconds' | 'mJ/cm2' = 'seconds') => {
  const opened = await openImportFile(file, kind)
  if (opened.kind === 'refused' || opened.guess.mapping === null) throw new Error('not opened')
  return opened.guess.mapping
}
async function read(text: string | Blob): Promise<ImportPreview> {
  const file = typeof text === 'string' ? blob(text) : text
  const outcome = await previewImportFile(file, await mappingOf(file), 'seconds', () => undefined, () => true)
  if (outcome.kind === 'refused') throw new Error(outcome.detail)
  return outcome
}

describe('reading an import file', () => {
  it('understands the demo file: semicolons, decimal commas, a row that cannot go in with its line', async () => {
    const preview = await read(new Blob([readFileSync('fixtures/data/south-bench-films.csv')]))
    expect(preview).toMatchObject({ accepted: 12, rejected: 1 })
    expect(preview.rejectedRows[0]?.line).toBe(8)
    expect(preview.rejectedRows[0]?.reasons.join()).toContain('torn')
  })

  it('reads a file piece by piece and counts all of it, with the first rows as understood', async () => {
    const rows = Array.from({ length: 30_000 }, (_, i) => `${(1.6 + (i % 40) / 10).toFixed(1)},${(0.06 + (i % 7) / 1000).toFixed(3)}`)
    rows[20_000] = 'x,0.1'
    let last = 0
    const file = blob(`time (s),thickness (mm)\n${rows.join('\n')}\n`)
    const outcome = await previewImportFile(file, await mappingOf(file), 'seconds', share => { expect(share).toBeGreaterThanOrEqual(last); last = share }, () => true)
    expect(outcome).toMatchObject({ kind: 'read', accepted: 29_999, rejected: 1, rejectedRows: [{ line: 20_002 }] })
    expect(last).toBe(1)
  })

  it('keeps a character that is cut by the end of a piece', async () => {
    const line = '1.6,60,Schicht für µm-Prüfung ä\n'
    const preview = await read(`time (s),thickness (um),note\n${line.repeat(20_000)}`)
    expect(preview).toMatchObject({ accepted: 20_000, rejected: 0 })
  })

  it('refuses what is no CSV, and a mapping in the other kind of exposure, with a sentence', async () => {
    expect(await openImportFile(new Blob([new Uint8Array([0x50, 0x4b, 3, 4, 0, 0])]), 'seconds')).toMatchObject({ kind: 'refused' })
    expect(await openImportFile(blob(''), 'seconds')).toMatchObject({ kind: 'refused' })
    const file = blob('dose (mJ/cm2),depth (um)\n10,60\n')
    const outcome = await previewImportFile(file, await mappingOf(file, 'mJ/cm2'), 'seconds', () => undefined, () => true)
    expect(outcome.kind).toBe('refused')
  })

  it('stops when another mapping was chosen', async () => {
    const file = blob('time (s),thickness (mm)\n1.6,0.06\n')
    expect((await previewImportFile(file, await mappingOf(file), 'seconds', () => undefined, () => false)).kind).toBe('refused')
  })
})
