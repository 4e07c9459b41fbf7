import { z } from 'zod'
import { idSchema, instantSchema, positiveSchema } from './common.ts'
import { operation } from './operation.ts'
import { studiesPath, studyParamsSchema } from './studies.ts'

export const filmReadingStateSchema = z.enum(['measured', 'no-film', 'lost-in-wash', 'excluded'])

/** 100 mm: no cured film is thicker; keeps sums of squares finite. Negative: substrate not subtracted right, kept and marked. */
const depthSchema = z.number().min(-100_000).max(100_000)

const filmReadingFields = {
  /** Seconds or mJ/cm², as the study's exposureKind says. */
  exposure: positiveSchema,
  /** What the person typed, as typed: "1,7 s". */
  exposureText: z.string().max(100),
  /** Column of the entry grid, from 1. With the exposure it names the cell. */
  replicate: z.int().min(1).max(100_000),
  /** Cured depth without substrate; null where there is none to measure. */
  depthMicrometres: depthSchema.nullable(),
  depthText: z.string().max(100),
  standardUncertaintyMicrometres: positiveSchema.nullable(),
  state: filmReadingStateSchema,
  /** Required with state excluded. */
  exclusionReason: z.string().trim().min(1).max(400).nullable(),
  note: z.string().max(400),
}

const stateFits = (r: { state: string; depthMicrometres: number | null; exclusionReason: string | null }, ctx: z.RefinementCtx) => {
  if (r.state === 'measured' && r.depthMicrometres === null) {
    ctx.addIssue({ code: 'custom', path: ['depthMicrometres'], message: 'A measured film needs its thickness.' })
  }
  if (r.state === 'excluded' && r.exclusionReason === null) {
    ctx.addIssue({ code: 'custom', path: ['exclusionReason'], message: 'Say why the reading is excluded.' })
  }
}

export const filmReadingSchema = z.object({
  ...filmReadingFields,
  id: idSchema,
  version: z.int().min(1),
  importBatchId: idSchema.nullable(),
  enteredBy: z.string(),
  enteredAt: instantSchema,
  updatedAt: instantSchema,
})
export type StoredFilmReading = z.infer<typeof filmReadingSchema>

/**
 * One cell as a person left it. The client makes the id (uuid v7), so that a cell typed while the connection was
 * lost can be sent again without doubling; `baseVersion` is the version the edit was made on (null: a new cell).
 */
export const filmReadingSaveSchema = z
  .strictObject({ ...filmReadingFields, id: idSchema, baseVersion: z.int().min(1).nullable(), withdrawn: z.boolean() })
  .superRefine(stateFits)
export type FilmReadingSave = z.infer<typeof filmReadingSaveSchema>

/** What became of one cell: nothing typed is ever dropped without an answer. */
export const filmReadingSavedSchema = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('saved'), id: idSchema, reading: filmReadingSchema }),
  z.object({ kind: z.literal('withdrawn'), id: idSchema, version: z.int() }),
  /** Somebody else changed it meanwhile (or filled the same cell): both versions are shown. */
  z.object({ kind: z.literal('stale'), id: idSchema, current: filmReadingSchema.nullable(), currentVersion: z.int() }),
])
export type FilmReadingSaved = z.infer<typeof filmReadingSavedSchema>

const path = `${studiesPath}/:studyId/film-readings` as const

export const listFilmReadings = operation({
  id: 'listFilmReadings', method: 'get', path, summary: 'The film readings of a study, by exposure and column', params: studyParamsSchema,
  query: z.object({ cursor: z.string().max(500).optional(), limit: z.coerce.number().int().min(1).max(10_000).default(10_000) }),
  response: z.object({ items: z.array(filmReadingSchema), nextCursor: z.string().nullable(), total: z.int(), readingsRevision: z.int() }),
  status: 200,
})
export const saveFilmReadings = operation({
  id: 'saveFilmReadings', method: 'post', path: `${path}/save`, summary: 'Save cells of the entry grid; each answers for itself', params: studyParamsSchema,
  body: z.strictObject({ readings: z.array(filmReadingSaveSchema).min(1).max(2000, 'At most 2000 cells at once; import a file instead.') }),
  response: z.object({ results: z.array(filmReadingSavedSchema), readingsRevision: z.int() }),
  status: 200,
})

/** A former value: what stood there, who changed it, when. */
export const filmReadingRevisionSchema = z.object({
  version: z.int(),
  before: z.object({ ...filmReadingFields, withdrawn: z.boolean() }),
  changedBy: z.string(),
  changedAt: instantSchema,
})
export const getFilmReadingHistory = operation({
  id: 'getFilmReadingHistory', method: 'get', path: `${path}/:readingId/history`, summary: 'The former values of one reading, newest first',
  params: studyParamsSchema.extend({ readingId: idSchema }), response: z.object({ items: z.array(filmReadingRevisionSchema) }), status: 200,
})

export const exportFilmReadings = operation({
  id: 'exportFilmReadings', method: 'get', path: `${studiesPath}/:studyId/film-readings.csv`, summary: 'The film readings as CSV, as R and pandas read it',
  params: studyParamsSchema, status: 200, produces: 'text/csv',
})
export const exportFilm = operation({
  id: 'exportFilm', method: 'get', path: `${studiesPath}/:studyId/film.json`, summary: 'Study, readings, fit and answers as JSON',
  params: studyParamsSchema, status: 200, produces: 'application/json',
})
export const exportFilmFit = operation({
  id: 'exportFilmFit', method: 'get', path: `${studiesPath}/:studyId/film-fit.csv`, summary: 'Parameters and answers of the film fit as CSV',
  params: studyParamsSchema, status: 200, produces: 'text/csv',
})

/** The server's own fit of the study, kept with the hash of its inputs and the library version. */
export const filmFitSummarySchema = z.object({
  inputsHash: z.string(),
  libraryVersion: z.string(),
  outcome: z.unknown(),
})
export const getFilmFit = operation({
  id: 'getFilmFit', method: 'get', path: `${studiesPath}/:studyId/film-fit`, summary: 'The working curve as the server fits it',
  params: studyParamsSchema, response: filmFitSummarySchema, status: 200,
})
