import { z } from 'zod'
import { idSchema, instantSchema, shopParamsSchema } from './common.ts'
import { operation } from './operation.ts'
import { exposureKindSchema, studyStateSchema } from './studies.ts'

const intervalSchema = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('finite'), lower: z.number(), upper: z.number() }),
  z.object({ kind: z.literal('exclusive'), roots: z.tuple([z.number(), z.number()]) }),
  z.object({ kind: z.literal('unbounded') }),
])
const benchEstimateSchema = z.object({ value: z.number(), interval: intervalSchema })

/** What is known about one study, as the bench shows it. */
export const benchStudySchema = z.object({
  id: idSchema,
  name: z.string(),
  state: studyStateSchema,
  layerHeightMicrometres: z.number(),
  lotCode: z.string().nullable(),
  exposureKind: exposureKindSchema,
  updatedAt: instantSchema,
  filmsMeasured: z.int(),
  filmsPlanned: z.int(),
  film: z.discriminatedUnion('kind', [
    z.object({ kind: z.literal('none') }),
    z.object({ kind: z.literal('refused'), detail: z.string() }),
    z.object({
      kind: z.literal('fitted'),
      penetrationDepthMicrometres: benchEstimateSchema,
      criticalExposure: benchEstimateSchema,
      /** Exposure for the study's layer height by its layer rule. */
      exposureForLayer: benchEstimateSchema,
      /** What the printer can be set to; null where a dose has no irradiance to turn it into seconds. */
      exposureOnStepSeconds: z.number().nullable(),
      extrapolated: z.boolean(),
      findings: z.array(z.object({ severity: z.enum(['info', 'caution', 'serious']), sentence: z.string() })),
    }),
  ]),
})
export type BenchStudy = z.infer<typeof benchStudySchema>

/** One thing that waits for somebody, most urgent first. */
export const attentionSchema = z.object({
  kind: z.enum(['films-to-print', 'films-to-measure', 'film-fit-doubtful', 'lot-expired', 'lot-expires-soon', 'rests-on-retired', 'no-study-yet', 'decide']),
  sentence: z.string(),
  studyId: idSchema.nullable(),
  pairingId: idSchema.nullable(),
  lotId: idSchema.nullable(),
})
export type Attention = z.infer<typeof attentionSchema>

export const benchSchema = z.object({
  printers: z.array(z.object({
    id: idSchema, name: z.string(), exposureStepSeconds: z.number(), exposureSecondsMin: z.number(), exposureSecondsMax: z.number(), lightEngineWavelengthNanometres: z.number(),
  })),
  resins: z.array(z.object({ id: idSchema, name: z.string(), description: z.string() })),
  pairings: z.array(z.object({ id: idSchema, printerId: idSchema, resinId: idSchema, studies: z.array(benchStudySchema) })),
  attention: z.array(attentionSchema),
})
export type Bench = z.infer<typeof benchSchema>

export const getBench = operation({
  id: 'getBench', method: 'get', path: '/api/shops/:shopId/bench', summary: 'Printers by resins: what is known, and what needs someone now', params: shopParamsSchema,
  response: benchSchema, status: 200,
})
