import { z } from 'zod'
import { idSchema, lifecycleSchema, listStateSchema, nameSchema, notesSchema, pageQuerySchema, pageSchema, positiveSchema, shopParamsSchema } from './common.ts'
import { operation } from './operation.ts'

export const exposureKindSchema = z.enum(['seconds', 'mJ/cm2'])

/** open: work goes on; paused: waits for something; decided: its answer is used. */
export const studyStateSchema = z.enum(['open', 'paused', 'decided'])

export const layerRuleNameSchema = z.enum(['constant-overcure', 'constant-ratio', 'far-side-dose'])

/** The films a bench sheet asks for, in the order to expose them. */
export const filmPlanSchema = z.strictObject({
  exposures: z.array(positiveSchema).min(1).max(200),
  basis: z.enum(['expected-exposure', 'nothing-known', 'own-choice']),
  expectedExposureAtTarget: positiveSchema.nullable(),
  plannedAt: z.iso.datetime({ offset: true }),
})
export type StoredFilmPlan = z.infer<typeof filmPlanSchema>

/** How the film chapter of a study reads and fits its numbers. */
export const filmSettingsSchema = z.strictObject({
  weighting: z.enum(['equal', 'stated', 'proportional']),
  confidenceLevel: z.number().min(0.5).max(0.999),
  /** What the columns of the entry grid are: separate films of one exposure, or readings of one film. */
  columnsAre: z.enum(['films', 'readings-of-one-film']),
  /** Subtracted from each typed value, in µm; 0 where the caliper was zeroed on the substrate. */
  substrateThicknessMicrometres: z.number().min(0).max(100_000),
  /** Unit of a typed value that names none. */
  entryUnit: z.enum(['um', 'mm', 'mil', 'in']),
  /** Repeatability (one standard deviation) of the caliper, where the shop knows it. */
  gaugeRepeatabilityMicrometres: positiveSchema.nullable(),
  /** Films that did not form or were lost enter the fit as censored (maximum likelihood). */
  useCensored: z.boolean(),
  /** The curve the person accepted; the straight line unless they chose otherwise. */
  model: z.enum(['straight-line', 'dead-time', 'quadratic', 'two-line-attenuation']),
  layerRule: layerRuleNameSchema,
  overcureMicrometres: z.number().min(-10_000).max(10_000),
  depthRatio: positiveSchema.max(100),
  plan: filmPlanSchema.nullable(),
})
export type FilmSettings = z.infer<typeof filmSettingsSchema>

export const defaultFilmSettings: FilmSettings = {
  weighting: 'equal',
  confidenceLevel: 0.95,
  columnsAre: 'films',
  substrateThicknessMicrometres: 0,
  entryUnit: 'mm',
  gaugeRepeatabilityMicrometres: null,
  useCensored: false,
  model: 'straight-line',
  layerRule: 'constant-overcure',
  overcureMicrometres: 50,
  depthRatio: 2,
  plan: null,
}

/** The smallest sizes the shop needs and the share of features that must pass. */
export const detailTargetSchema = z.strictObject({
  mustFormSizeMicrometres: positiveSchema.nullable(),
  mustStayOpenSizeMicrometres: positiveSchema.nullable(),
  shareMustForm: z.number().min(0.5).max(0.999),
  shareMustStayOpen: z.number().min(0.5).max(0.999),
})

const studyFields = {
  name: nameSchema,
  lotId: idSchema.nullable(),
  layerHeightMicrometres: positiveSchema.max(1000, 'At most 1000 µm.'),
  resinTemperatureCelsius: z.number().min(-20).max(150).nullable(),
  notes: notesSchema,
}

export const newStudySchema = z.strictObject({
  ...studyFields,
  pairingId: idSchema,
  exposureKind: exposureKindSchema.default('seconds'),
})
export const studyChangeSchema = z.strictObject({
  ...studyFields,
  state: studyStateSchema,
  exposureKind: exposureKindSchema,
  detailTarget: detailTargetSchema.nullable(),
  film: filmSettingsSchema,
}).partial()

export const studySchema = lifecycleSchema.extend({
  ...studyFields,
  pairingId: idSchema,
  printerId: idSchema,
  printerName: z.string(),
  resinId: idSchema,
  resinName: z.string(),
  lotCode: z.string().nullable(),
  /** Of the study's printer, so that a page needs no second call. */
  printer: z.object({
    exposureStepSeconds: z.number(),
    exposureSecondsMin: z.number(),
    exposureSecondsMax: z.number(),
    irradianceMilliwattsPerSquareCentimetre: z.number().nullable(),
    lightEngineWavelengthNanometres: z.number(),
  }),
  exposureKind: exposureKindSchema,
  state: studyStateSchema,
  detailTarget: detailTargetSchema.nullable(),
  film: filmSettingsSchema,
  /** Rises with every saved reading: a cheap way to know that something moved. */
  readingsRevision: z.int(),
  filmReadingCount: z.int(),
})
export type Study = z.infer<typeof studySchema>
export type NewStudy = z.infer<typeof newStudySchema>
export type StudyChange = z.infer<typeof studyChangeSchema>

export const studyParamsSchema = shopParamsSchema.extend({ studyId: idSchema })
export const studiesPath = '/api/shops/:shopId/studies'

export const listStudies = operation({
  id: 'listStudies', method: 'get', path: studiesPath, summary: 'The studies of a shop', params: shopParamsSchema,
  query: pageQuerySchema.extend({
    q: z.string().max(120).optional(), state: listStateSchema,
    work: studyStateSchema.optional(),
    printerId: idSchema.optional(), resinId: idSchema.optional(), pairingId: idSchema.optional(), lotId: idSchema.optional(),
    sort: z.enum(['name', '-name', 'layerHeightMicrometres', '-layerHeightMicrometres', 'printerName', '-printerName', 'resinName', '-resinName', 'updatedAt', '-updatedAt']).default('-updatedAt'),
  }),
  response: pageSchema(studySchema), status: 200,
})
export const getStudy = operation({
  id: 'getStudy', method: 'get', path: `${studiesPath}/:studyId`, summary: 'One study', params: studyParamsSchema, response: studySchema, status: 200,
})
export const createStudy = operation({
  id: 'createStudy', method: 'post', path: studiesPath, summary: 'Open a study', params: shopParamsSchema, body: newStudySchema,
  response: studySchema, status: 201, retrySafe: true,
})
export const updateStudy = operation({
  id: 'updateStudy', method: 'patch', path: `${studiesPath}/:studyId`, summary: 'Change a study or its film settings', params: studyParamsSchema, body: studyChangeSchema,
  response: studySchema, status: 200, versioned: true,
})
export const retireStudy = operation({
  id: 'retireStudy', method: 'post', path: `${studiesPath}/:studyId/retire`, summary: 'Retire a study', params: studyParamsSchema, response: studySchema, status: 200, versioned: true,
})
export const restoreStudy = operation({
  id: 'restoreStudy', method: 'post', path: `${studiesPath}/:studyId/restore`, summary: 'Restore a retired study', params: studyParamsSchema, response: studySchema, status: 200, versioned: true,
})
