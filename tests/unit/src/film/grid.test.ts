import { describe, expect, it } from 'vitest'
import type { StoredFilmReading } from '#shared/contracts/film.ts'
import { cellsOf, contentOfCell } from '@/composables/film/film-cells.ts'
import { emptyHistory, redo, undo, withEdit } from '@/composables/film/edit-history.ts'
import { arrowPlace, nextPlace, plannedPlaces } from '@/composables/film/grid-moves.ts'
import { blockOf, readPaste } from '@/composables/film/read-paste.ts'
import { contentFromTyped, readTypedCell } from '@/composables/film/read-typed.ts'
import { newestWins } from '@/composables/newest-wins.ts'
import type { OutboxEntry } from '@/api/film-outbox.ts'

const settings = { entryUnit: 'mm', substrateThicknessMicrometres: 0 } as const

describe('readTypedCell', () => {
  it.each([
    ['0.085', 85, '0.085 mm'], ['0,085', 85, '0,085 mm'], ['0.085 mm', 85, '0.085 mm'], ['85um', 85, '85um'], ['85 µm', 85, '85 µm'], ['3.3 mil', 83.82, '3.3 mil'],
  ])('understands %s as %d µm and keeps it with its unit', (text, micrometres, kept) => {
    const typed = readTypedCell(text, settings)
    expect(typed.kind).toBe('depth')
    if (typed.kind !== 'depth') return
    expect(typed.depthMicrometres).toBeCloseTo(micrometres, 6)
    expect(typed.depthText).toBe(kept)
  })

  it('subtracts the substrate, also below zero, and leaves no binary tail', () => {
    expect(readTypedCell('1.085', { ...settings, substrateThicknessMicrometres: 1000 })).toMatchObject({ kind: 'depth', depthMicrometres: 85 })
    expect(readTypedCell('0.9', { ...settings, substrateThicknessMicrometres: 1000 })).toMatchObject({ kind: 'depth', depthMicrometres: -100 })
  })

  it('reads words for films that are not there', () => {
    expect(readTypedCell('No film', settings)).toEqual({ kind: 'state', state: 'no-film' })
    expect(readTypedCell('lost', settings)).toEqual({ kind: 'state', state: 'lost-in-wash' })
    expect(readTypedCell('  ', settings)).toEqual({ kind: 'empty' })
  })

  it('keeps what it cannot read, with a sentence', () => {
    expect(readTypedCell('8x5', settings)).toMatchObject({ kind: 'unreadable', text: '8x5' })
  })

  it('leaves an excluded film excluded when its number is typed again', () => {
    const former = { note: 'torn', state: 'excluded', exclusionReason: 'torn edge', standardUncertaintyMicrometres: null } as const
    expect(contentFromTyped(readTypedCell('0.09', settings), { exposure: 2, exposureText: '2', replicate: 1 }, former)).toMatchObject({ state: 'excluded', exclusionReason: 'torn edge', note: 'torn' })
  })
})

describe('where the next cell is', () => {
  const shape = { exposures: [1.6, 2.1, 2.9], columns: 4, plan: [2.1, 1.6, 2.9, 2.1], filmsPerRow: 2 }

  it('goes across the films of a row and then to the next row', () => {
    expect(nextPlace({ exposure: 1.6, replicate: 1 }, shape, 'across')).toEqual({ exposure: 1.6, replicate: 2 })
    expect(nextPlace({ exposure: 1.6, replicate: 2 }, shape, 'across')).toEqual({ exposure: 2.1, replicate: 1 })
    expect(nextPlace({ exposure: 2.9, replicate: 2 }, shape, 'across')).toBeNull()
  })

  it('goes to the next row from a film beyond those that the rows have', () => {
    expect(nextPlace({ exposure: 1.6, replicate: 3 }, shape, 'across')).toEqual({ exposure: 2.1, replicate: 1 })
  })

  it('goes back with Shift', () => {
    expect(nextPlace({ exposure: 2.1, replicate: 1 }, shape, 'across', -1)).toEqual({ exposure: 1.6, replicate: 2 })
    expect(nextPlace({ exposure: 1.6, replicate: 1 }, shape, 'across', -1)).toBeNull()
  })

  it('follows the bench sheet, where the second time an exposure comes is its second film', () => {
    expect(plannedPlaces(shape.plan).at(-1)).toEqual({ exposure: 2.1, replicate: 2 })
    expect(nextPlace({ exposure: 2.1, replicate: 1 }, shape, 'planned')).toEqual({ exposure: 1.6, replicate: 1 })
    expect(nextPlace({ exposure: 2.9, replicate: 1 }, shape, 'planned')).toEqual({ exposure: 2.1, replicate: 2 })
    expect(nextPlace({ exposure: 2.1, replicate: 2 }, shape, 'planned')).toBeNull()
  })

  it('goes across from a film that the plan does not have', () => {
    expect(nextPlace({ exposure: 1.6, replicate: 2 }, shape, 'planned')).toEqual({ exposure: 2.1, replicate: 1 })
  })

  it('moves with arrows and stops at the edges', () => {
    expect(arrowPlace({ exposure: 2.1, replicate: 4 }, shape, 'ArrowRight')).toBeNull()
    expect(arrowPlace({ exposure: 2.1, replicate: 3 }, shape, 'ArrowRight')).toEqual({ exposure: 2.1, replicate: 4 })
    expect(arrowPlace({ exposure: 1.6, replicate: 1 }, shape, 'ArrowUp')).toBeNull()
    expect(arrowPlace({ exposure: 1.6, replicate: 1 }, shape, 'ArrowDown')).toEqual({ exposure: 2.1, replicate: 1 })
  })
})

describe('readPaste', () => {
  const grid = { exposures: [1.6, 2.1, 2.9], exposureTexts: new Map([[1.6, '1.6'], [2.1, '2.1'], [2.9, '2.9']]), exposureKind: 'seconds' } as const

  it('fills to the right and below, and leaves empty cells alone', () => {
    const { cells, remarks } = readPaste('0.06\t\n0.10\t0.11\n', { exposure: 1.6, replicate: 2 }, grid)
    expect(cells.map(cell => [cell.exposure, cell.replicate, cell.text])).toEqual([[1.6, 2, '0.06'], [2.1, 2, '0.10'], [2.1, 3, '0.11']])
    expect(remarks).toEqual([])
  })

  it('says how many rows lie below the grid instead of dropping them silently', () => {
    const { cells, remarks } = readPaste('1\n2\n3', { exposure: 2.1, replicate: 1 }, grid)
    expect(cells).toHaveLength(2)
    expect(remarks[0]).toContain('1 pasted row reaches below')
  })

  it('takes the first column for exposures when the header says so, with the units of the header', () => {
    const { cells, depthUnit } = readPaste('Time (ms)\tThickness (µm)\n1600\t60\n4200\t130\n', { exposure: 1.6, replicate: 1 }, grid)
    expect(cells.map(cell => [cell.exposure, cell.replicate, cell.text])).toEqual([[1.6, 1, '60'], [4.2, 1, '130']])
    expect(depthUnit).toBe('um')
  })

  it('takes exposures when pasted onto the exposure column; one that comes again is a further film', () => {
    const { cells } = readPaste('1,6\t0,06\n2,1\t0,10\n1,6\t0,07', { exposure: null, replicate: 1 }, grid)
    expect(cells.map(cell => [cell.exposure, cell.replicate, cell.text])).toEqual([[1.6, 1, '0,06'], [2.1, 1, '0,10'], [1.6, 2, '0,07']])
  })

  it('names rows whose exposure cannot be read', () => {
    const { cells, remarks } = readPaste('1.6\t0.06\nabc\t0.1', { exposure: null, replicate: 1 }, grid)
    expect(cells).toHaveLength(1)
    expect(remarks[0]).toContain('Row 2')
  })

  it('reads quoted cells with line ends and quotes as one cell', () => {
    expect(blockOf('"a\nb"\t"say ""so"""\r\n1\t2\r\n')).toEqual([['a\nb', 'say "so"'], ['1', '2']])
  })
})

describe('undo and redo', () => {
  const content = (depth: number) => ({ exposure: 1.6, exposureText: '1.6', replicate: 1, depthMicrometres: depth, depthText: '', standardUncertaintyMicrometres: null, state: 'measured' as const, exclusionReason: null, note: '', withdrawn: false })

  it('goes back and forth through the same states', () => {
    let history = withEdit(emptyHistory, { label: 'first', changes: [{ id: 'a', before: null, after: content(60) }] })
    history = withEdit(history, { label: 'second', changes: [{ id: 'a', before: content(60), after: content(61) }] })
    const one = undo(history)
    expect(one?.changes).toEqual([{ id: 'a', before: content(61), after: content(60) }])
    const two = undo(one?.history ?? emptyHistory)
    expect(two?.changes).toEqual([{ id: 'a', before: content(60), after: null }])
    expect(undo(two?.history ?? history)).toBeNull()
    expect(redo(two?.history ?? emptyHistory)?.changes).toEqual([{ id: 'a', before: null, after: content(60) }])
  })

  it('cannot do again what a new edit has replaced', () => {
    const back = undo(withEdit(emptyHistory, { label: 'first', changes: [] }))
    expect(redo(withEdit(back?.history ?? emptyHistory, { label: 'other', changes: [] }))).toBeNull()
  })
})

describe('cellsOf', () => {
  const stored: StoredFilmReading = {
    id: 'a', exposure: 1.6, exposureText: '1.6', replicate: 1, depthMicrometres: 60, depthText: '0.060 mm', standardUncertaintyMicrometres: null, state: 'measured',
    exclusionReason: null, note: '', version: 2, importBatchId: null, enteredBy: 'Milo', enteredAt: '', updatedAt: '',
  }
  const entry = (change: Partial<OutboxEntry['save']>): OutboxEntry => ({
    userId: 'u', shopId: 's', studyId: 't', edit: 'e', typedAt: 0, status: { kind: 'waiting' },
    save: { ...contentOfCell({ ...stored, withdrawn: false, entry: null }), id: 'a', baseVersion: 2, ...change },
  })

  it('shows what was typed before what is stored', () => {
    expect(cellsOf([stored], [entry({ depthMicrometres: 71 })]).get('1.6|1')?.depthMicrometres).toBe(71)
  })
  it('leaves a cell empty while its clearing waits to be sent', () => {
    expect(cellsOf([stored], [entry({ withdrawn: true })]).size).toBe(0)
  })
})

describe('newestWins', () => {
  it('drops questions in between and answers that are out of date', async () => {
    const asked: number[] = []
    const taken: number[] = []
    const gates: (() => void)[] = []
    const ask = newestWins<number, number>(question => {
      asked.push(question)
      return new Promise(resolve => gates.push(() => resolve(question * 10)))
    }, answer => taken.push(answer), () => undefined)
    for (const question of [1, 2, 3]) ask(question)
    gates[0]?.()
    await new Promise(resolve => setTimeout(resolve))
    gates[1]?.()
    await new Promise(resolve => setTimeout(resolve))
    expect(asked).toEqual([1, 3])
    expect(taken).toEqual([30])
  })

  it('goes on after a failure', async () => {
    const failures: unknown[] = []
    const ask = newestWins<number, number>(async question => { if (question === 1) throw new Error('no'); return question }, () => undefined, error => failures.push(error))
    ask(1)
    await new Promise(resolve => setTimeout(resolve))
    ask(2)
    expect(failures).toHaveLength(1)
  })
})
