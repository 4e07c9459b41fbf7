import type { CellPlace } from './film-cells.ts'

/** `across`: along the row, then to the next row. `planned`: in the order in which the bench sheet exposes the films. */
export type EnterOrder = 'across' | 'planned'

export interface GridShape {
  /** Exposures of the rows, top to bottom. */
  readonly exposures: readonly number[]
  readonly columns: number
  /** Exposures of the plan in their order; the second time an exposure comes is its second film. */
  readonly plan: readonly number[]
}

/** The plan's films as places of the grid. */
export function plannedPlaces(plan: readonly number[]): readonly CellPlace[] {
  const seen = new Map<number, number>()
  return plan.map(exposure => {
    const replicate = (seen.get(exposure) ?? 0) + 1
    seen.set(exposure, replicate)
    return { exposure, replicate }
  })
}

/**
 * Where Enter goes from a cell; null at the end, where the cell stays.
 *
 * Across a row it ends with the films that the row is meant to have: `filmsPerRow`, not the empty column beyond.
 */
export function nextPlace(from: CellPlace, shape: GridShape & { readonly filmsPerRow: number }, order: EnterOrder, step: 1 | -1 = 1): CellPlace | null {
  if (order === 'planned') {
    const places = plannedPlaces(shape.plan)
    const at = places.findIndex(place => place.exposure === from.exposure && place.replicate === from.replicate)
    if (at >= 0) return places[at + step] ?? null
  }
  const row = shape.exposures.indexOf(from.exposure)
  if (row < 0) return null
  const wanted = from.replicate + step
  if (wanted >= 1 && wanted <= Math.max(shape.filmsPerRow, from.replicate - 1)) return { exposure: from.exposure, replicate: wanted }
  const exposure = shape.exposures[row + step]
  return exposure === undefined ? null : { exposure, replicate: step === 1 ? 1 : shape.filmsPerRow }
}

/** Where an arrow key goes; null at the edge. */
export function arrowPlace(from: CellPlace, shape: GridShape, key: 'ArrowUp' | 'ArrowDown' | 'ArrowLeft' | 'ArrowRight'): CellPlace | null {
  const row = shape.exposures.indexOf(from.exposure)
  const down = key === 'ArrowDown' ? 1 : key === 'ArrowUp' ? -1 : 0
  const right = key === 'ArrowRight' ? 1 : key === 'ArrowLeft' ? -1 : 0
  const exposure = shape.exposures[row + down]
  const replicate = from.replicate + right
  return row < 0 || exposure === undefined || replicate < 1 || replicate > shape.columns ? null : { exposure, replicate }
}
