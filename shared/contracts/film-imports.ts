import { z } from 'zod'
import { idSchema, instantSchema, shopParamsSchema } from './common.ts'
import { operation } from './operation.ts'
import { studiesPath, studyParamsSchema } from './studies.ts'

export const exposureUnitSchema = z.enum(['s', 'ms', 'mJ/cm2', 'J/m2'])
export const lengthUnitSchema = z.enum(['um', 'mm', 'mil', 'in'])

const columnSchema = z.int().min(0).max(499)

/** Which column means what, chosen once by a person and remembered for files with the same header. */
export const filmImportMappingSchema = z.strictObject({
  encoding: z.enum(['utf-8', 'utf-16le', 'utf-16be', 'windows-1252']),
  delimiter: z.enum([',', ';', '\t', '|']),
  decimalMark: z.enum(['.', ',']),
  headerRows: z.int().min(0).max(20),
  exposure: z.strictObject({ column: columnSchema, unit: exposureUnitSchema }),
  depth: z.strictObject({ column: columnSchema, unit: lengthUnitSchema }),
  state: z.strictObject({ column: columnSchema }).nullable(),
  uncertainty: z.strictObject({ column: columnSchema, unit: lengthUnitSchema }).nullable(),
  /** Column that tells films of one exposure apart; absent: rows of one exposure are numbered as they come. */
  replicate: z.strictObject({ column: columnSchema }).nullable(),
  note: z.strictObject({ column: columnSchema }).nullable(),
  substrateThicknessMicrometres: z.number().min(0).max(100_000),
})
export type FilmImportMapping = z.infer<typeof filmImportMappingSchema>

export const rejectedRowSchema = z.object({
  /** Line of the file, from 1, where the row begins. */
  line: z.int(),
  cells: z.array(z.string()),
  reasons: z.array(z.string()),
})
export type RejectedRow = z.infer<typeof rejectedRowSchema>

export const importBatchSchema = z.object({
  id: idSchema,
  fileName: z.string(),
  acceptedRows: z.int(),
  rejectedRows: z.int(),
  importedBy: z.string(),
  importedAt: instantSchema,
  withdrawnAt: instantSchema.nullable(),
})
export type ImportBatch = z.infer<typeof importBatchSchema>

const path = `${studiesPath}/:studyId/film-imports`
const batchParams = studyParamsSchema.extend({ batchId: idSchema })

/** At most this many data rows and bytes in one file: more is refused before anything is written. */
export const importRowsMax = 200_000
export const importBytesMax = 50_000_000

/**
 * The file itself is the body. The batch id comes from the client: sending the same batch again answers what the first
 * sending did and changes nothing.
 */
export const importFilmReadings = operation({
  id: 'importFilmReadings', method: 'put', path: `${path}/:batchId`, summary: 'Import a CSV file of film readings; good rows in one transaction, bad rows answered with their reasons',
  params: batchParams,
  query: z.object({
    fileName: z.string().min(1).max(200),
    /** JSON of the mapping. */
    mapping: z.string().max(4000),
    /**
     * JSON array of the header's cells as the client saw them: the mapping is remembered under it too. The file's own
     * header is remembered anyway, so leave it out where it would make the address long (over 8000 characters).
     */
    header: z.string().max(20_000).optional(),
  }),
  response: z.object({ batch: importBatchSchema, rejected: z.array(rejectedRowSchema), alreadyImported: z.boolean(), readingsRevision: z.int() }),
  status: 201, consumes: 'text/csv',
})
export const listFilmImports = operation({
  id: 'listFilmImports', method: 'get', path, summary: 'The imports of a study, newest first', params: studyParamsSchema,
  response: z.object({ items: z.array(importBatchSchema) }), status: 200,
})
export const exportRejectedRows = operation({
  id: 'exportRejectedRows', method: 'get', path: `${path}/:batchId/rejected.csv`, summary: 'The rejected rows of an import as CSV, to mend and import again',
  params: batchParams, status: 200, produces: 'text/csv',
})
export const withdrawFilmImport = operation({
  id: 'withdrawFilmImport', method: 'post', path: `${path}/:batchId/withdraw`, summary: 'Withdraw every reading of an import',
  params: batchParams, response: z.object({ batch: importBatchSchema, readingsRevision: z.int() }), status: 200,
})
export const restoreFilmImport = operation({
  id: 'restoreFilmImport', method: 'post', path: `${path}/:batchId/restore`, summary: 'Undo the withdrawal of an import',
  params: batchParams, response: z.object({ batch: importBatchSchema, readingsRevision: z.int() }), status: 200,
})
export const findImportMapping = operation({
  id: 'findImportMapping', method: 'post', path: '/api/shops/:shopId/import-mappings/find', summary: 'The mapping remembered for a header',
  params: shopParamsSchema, body: z.strictObject({ header: z.array(z.string().max(500)).max(500) }),
  response: z.object({ mapping: filmImportMappingSchema.nullable() }), status: 200,
})
