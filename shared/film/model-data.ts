import { fitWorkingCurve, type WorkingCurveOptions } from './fit-working-curve.ts'
import type { FilmModelRefusal, ModelPoint } from './film-model-types.ts'
import type { WorkingCurveFit } from './types.ts'

/** What every film model starts from: the averaged, checked and weighted films and the straight line through them. */
export interface ModelData {
  readonly kind: 'ready'
  readonly line: WorkingCurveFit
  readonly points: readonly ModelPoint[]
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
  return { kind: 'ready', line, points }
}
