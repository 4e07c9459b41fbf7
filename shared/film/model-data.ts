import { fitWorkingCurve, type WorkingCurveOptions } from './fit-working-curve.ts'
import type { FilmModelRefusal, ModelPoint } from './film-model-types.ts'
import type { WorkingCurveFit } from './types.ts'

/** What every film model starts from: the averaged, checked and weighted films and the straight line through them. */
export interface ModelData {
  readonly kind: 'ready'
  readonly line: WorkingCurveFit
  readonly points: readonly ModelPoint[]
  /** One point for each exposure: mean depth and summed weight. A curve fits these as it fits all films. */
  readonly levels: readonly ModelPoint[]
  /** What films of one exposure leave over about their mean. */
  readonly pureError: { readonly sumOfSquares: number; readonly degreesOfFreedom: number }
}

/**
 * Prepares films for a model with three parameters or more.
 *
 * @returns refused where the straight line is, and with fewer than four exposures: three always fit a bend
 */
export function prepareModelData(options: WorkingCurveOptions): ModelData | FilmModelRefusal {
  const line = fitWorkingCurve(options)
  if (line.kind === 'refused') return line
  if (line.levelCount < 4) {
    return {
      kind: 'refused',
      reason: 'too-few-levels',
      detail: `A curve with a bend needs films at four exposures or more; there are ${line.levelCount}.`,
    }
  }
  const points = line.points.map(({ exposure, depthMicrometres, weight }) => ({ exposure, depthMicrometres, weight }))
  return { kind: 'ready', line, points, ...groupByExposure(points) }
}

function groupByExposure(points: readonly ModelPoint[]): Pick<ModelData, 'levels' | 'pureError'> {
  const groups = new Map<number, { weight: number; sum: number }>()
  for (const { exposure, depthMicrometres, weight } of points) {
    const group = groups.get(exposure) ?? { weight: 0, sum: 0 }
    group.weight += weight
    group.sum += weight * depthMicrometres
    groups.set(exposure, group)
  }
  let sumOfSquares = 0
  for (const { exposure, depthMicrometres, weight } of points) {
    const group = groups.get(exposure)
    if (group !== undefined) sumOfSquares += weight * (depthMicrometres - group.sum / group.weight) ** 2
  }
  return {
    levels: [...groups].map(([exposure, { weight, sum }]) => ({ exposure, depthMicrometres: sum / weight, weight })),
    pureError: { sumOfSquares, degreesOfFreedom: points.length - groups.size },
  }
}
