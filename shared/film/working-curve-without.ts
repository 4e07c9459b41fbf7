import { fitWorkingCurve, type WorkingCurveOptions } from './fit-working-curve.ts'
import type { WorkingCurveOutcome } from './types.ts'

/**
 * The same fit with some readings left out: shown beside the whole one, never instead of it.
 *
 * @param readingIndexes - positions in `options.readings`, such as those of an outlier finding
 * @example
 * workingCurveWithout({ readings, exposureKind: 'seconds' }, finding.readingIndexes ?? [])
 */
export function workingCurveWithout(options: WorkingCurveOptions, readingIndexes: readonly number[]): WorkingCurveOutcome {
  const left = new Set(readingIndexes)
  const readings = options.readings.map((reading, index) => (left.has(index) ? { ...reading, state: 'excluded' as const } : reading))
  return fitWorkingCurve({ ...options, readings })
}
