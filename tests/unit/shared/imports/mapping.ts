import type { FilmImportMapping } from '#shared/contracts/film-imports.ts'

/** A comma-separated file with exposure in s, thickness in µm, state, note: what the tests start from. */
export const plainMapping: FilmImportMapping = {
  encoding: 'utf-8',
  delimiter: ',',
  decimalMark: '.',
  headerRows: 1,
  exposure: { column: 0, unit: 's' },
  depth: { column: 1, unit: 'um' },
  state: null,
  uncertainty: null,
  replicate: null,
  note: null,
  substrateThicknessMicrometres: 0,
}
