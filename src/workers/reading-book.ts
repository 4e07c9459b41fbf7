import type { StoredFilmReading } from '#shared/contracts/film.ts'
import type { CurrentReading } from './film-answer-types.ts'

/** What stands on the screen and not yet on the server. */
export interface TypedOver {
  readonly typed: readonly CurrentReading[]
  /** Stored readings that were cleared or are being overwritten. */
  readonly hiddenIds: readonly string[]
}

export interface GridWindow {
  readonly rowOffset: number
  readonly rowCount: number
  readonly columnOffset: number
  readonly columnCount: number
  /** Only exposures between these; null: no limit. */
  readonly exposureFrom: number | null
  readonly exposureTo: number | null
  /** Rows without any stored reading: planned or just added. */
  readonly extraExposures: readonly number[]
}

export interface GridRow {
  readonly exposure: number
  /** Stored readings of it. */
  readonly count: number
}

export interface GridPage {
  readonly rows: readonly GridRow[]
  readonly readings: readonly StoredFilmReading[]
  /** Rows that the filter leaves, and in all. */
  readonly rowTotal: number
  readonly exposureTotal: number
  /** Highest film number of the rows that the filter leaves. */
  readonly columnTotal: number
  readonly readingTotal: number
}

/** The stored readings of one study, kept in the worker: a hundred thousand of them never pass through the page. */
export class ReadingBook {
  private byId = new Map<string, StoredFilmReading>()
  private sorted: readonly StoredFilmReading[] | null = null

  replace(readings: Iterable<StoredFilmReading>): void {
    this.byId = new Map()
    this.sorted = null
    for (const reading of readings) this.byId.set(reading.id, reading)
  }

  take(saved: readonly StoredFilmReading[], withdrawnIds: readonly string[]): void {
    for (const reading of saved) {
      const known = this.byId.get(reading.id)
      if (known === undefined || known.version <= reading.version) this.byId.set(reading.id, reading)
    }
    for (const id of withdrawnIds) this.byId.delete(id)
    this.sorted = null
  }

  get size(): number {
    return this.byId.size
  }

  /** In the order of the grid, which is the server's order: sums then agree to the last digit. */
  ordered(): readonly StoredFilmReading[] {
    this.sorted ??= [...this.byId.values()].sort((a, b) => a.exposure - b.exposure || a.replicate - b.replicate)
    return this.sorted
  }

  /** Stored readings with what was typed and is not stored yet laid over them. */
  current({ typed, hiddenIds }: TypedOver): readonly CurrentReading[] {
    const ordered = this.ordered()
    if (typed.length === 0 && hiddenIds.length === 0) return ordered
    const hidden = new Set([...hiddenIds, ...typed.map(reading => reading.id)])
    return [...ordered.filter(reading => !hidden.has(reading.id)), ...typed].sort((a, b) => a.exposure - b.exposure || a.replicate - b.replicate)
  }

  page(window: GridWindow): GridPage {
    const inside = (exposure: number) => (window.exposureFrom === null || exposure >= window.exposureFrom) && (window.exposureTo === null || exposure <= window.exposureTo)
    const counts = new Map<number, number>()
    let columnTotal = 0
    for (const { exposure, replicate } of this.ordered()) {
      counts.set(exposure, (counts.get(exposure) ?? 0) + 1)
      if (replicate > columnTotal && inside(exposure)) columnTotal = replicate
    }
    for (const exposure of window.extraExposures) if (!counts.has(exposure)) counts.set(exposure, 0)
    const all = [...counts].map(([exposure, count]) => ({ exposure, count })).filter(row => inside(row.exposure)).sort((a, b) => a.exposure - b.exposure)
    const rows = all.slice(window.rowOffset, window.rowOffset + window.rowCount)
    const shown = new Set(rows.map(row => row.exposure))
    const last = window.columnOffset + window.columnCount
    return {
      rows,
      readings: this.ordered().filter(reading => shown.has(reading.exposure) && reading.replicate > window.columnOffset && reading.replicate <= last),
      rowTotal: all.length, exposureTotal: counts.size, columnTotal, readingTotal: this.byId.size,
    }
  }
}
