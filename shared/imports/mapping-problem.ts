import type { FilmImportMapping } from '../contracts/film-imports.ts'
import type { ExposureKind } from './guess-mapping.ts'
import { isTimeUnit } from './scale.ts'
import { unitLabels } from './unit-words.ts'

/**
 * Why a mapping cannot serve a study, as a sentence, or null. Seconds and energy are not converted into each other: the
 * irradiance that would do it is a measurement of its own.
 *
 * @example
 * mappingProblem({ ...mapping, exposure: { column: 0, unit: 'mJ/cm2' } }, 'seconds') // => 'This study counts …'
 */
export function mappingProblem(mapping: FilmImportMapping, exposureKind: ExposureKind): string | null {
  if (isTimeUnit(mapping.exposure.unit) !== (exposureKind === 'seconds')) {
    const counted = exposureKind === 'seconds' ? 'in seconds' : 'in mJ/cm²'
    return `This study counts exposure ${counted}, the file's column is in ${unitLabels[mapping.exposure.unit]}. Choose the right unit, or a study that counts that way: seconds and energy are not converted without a measured irradiance.`
  }
  const columns = [mapping.exposure, mapping.depth, mapping.state, mapping.uncertainty, mapping.replicate, mapping.note]
    .flatMap(part => (part === null ? [] : [part.column]))
  if (new Set(columns).size !== columns.length) return 'One column is chosen for two meanings. Choose a column of its own for each.'
  return null
}

/**
 * Why a mapping cannot serve a file of this width, as a sentence, or null: a column that is not there would reject every
 * row one by one.
 *
 * @param width - cells of the header, or of the first row where there is none
 */
export function mappingWidthProblem(mapping: FilmImportMapping, width: number): string | null {
  const columns = [mapping.exposure, mapping.depth, mapping.state, mapping.uncertainty, mapping.replicate, mapping.note]
    .flatMap(part => (part === null ? [] : [part.column]))
  const last = Math.max(...columns)
  return last < width ? null : `The mapping points at column ${last + 1}, the file has ${width}. Check the delimiter and the columns.`
}
