import { z } from 'zod'
import { idSchema, lifecycleSchema, listStateSchema, nameSchema, notesSchema, pageQuerySchema, pageSchema, positiveSchema, shopParamsSchema } from './common.ts'
import { operation } from './operation.ts'

const printerFields = {
  name: nameSchema,
  /** 200 to 800 nm: from UV-C to red; anything else is a typing slip. */
  lightEngineWavelengthNanometres: z.number().min(200, 'At least 200 nm.').max(800, 'At most 800 nm.'),
  pixelSizeMicrometres: positiveSchema.max(1000, 'At most 1000 µm.'),
  plateWidthMillimetres: positiveSchema.max(5000),
  plateDepthMillimetres: positiveSchema.max(5000),
  /** The finest change of exposure the printer takes. */
  exposureStepSeconds: z.number().min(0.001, 'At least 0.001 s.').max(60, 'At most 60 s.'),
  exposureSecondsMin: positiveSchema.max(3600),
  exposureSecondsMax: positiveSchema.max(3600),
  /** Known only where somebody has metered it; turns seconds into mJ/cm². */
  irradianceMilliwattsPerSquareCentimetre: positiveSchema.max(10_000).nullable(),
  notes: notesSchema,
}

const rangeIsOrdered = (value: { exposureSecondsMin?: number | undefined; exposureSecondsMax?: number | undefined }) =>
  value.exposureSecondsMin === undefined ||
  value.exposureSecondsMax === undefined ||
  value.exposureSecondsMin < value.exposureSecondsMax
const rangeProblem = { error: 'The longest exposure must be above the shortest.', path: ['exposureSecondsMax'] }

export const newPrinterSchema = z.strictObject(printerFields).refine(rangeIsOrdered, rangeProblem)
export const printerChangeSchema = z.strictObject(printerFields).partial().refine(rangeIsOrdered, rangeProblem)
export const printerSchema = lifecycleSchema.extend(printerFields)
export type Printer = z.infer<typeof printerSchema>
export type NewPrinter = z.infer<typeof newPrinterSchema>

const params = shopParamsSchema.extend({ printerId: idSchema })
const path = '/api/shops/:shopId/printers'

export const listPrinters = operation({
  id: 'listPrinters', method: 'get', path, summary: 'The printers of a shop', params: shopParamsSchema,
  query: pageQuerySchema.extend({
    q: z.string().max(120).optional(),
    state: listStateSchema,
    sort: z.enum(['name', '-name', 'lightEngineWavelengthNanometres', '-lightEngineWavelengthNanometres', 'updatedAt', '-updatedAt']).default('name'),
  }),
  response: pageSchema(printerSchema), status: 200,
})
export const getPrinter = operation({
  id: 'getPrinter', method: 'get', path: `${path}/:printerId`, summary: 'One printer', params, response: printerSchema, status: 200,
})
export const createPrinter = operation({
  id: 'createPrinter', method: 'post', path, summary: 'Add a printer', params: shopParamsSchema, body: newPrinterSchema,
  response: printerSchema, status: 201, retrySafe: true,
})
export const updatePrinter = operation({
  id: 'updatePrinter', method: 'patch', path: `${path}/:printerId`, summary: 'Change a printer', params, body: printerChangeSchema,
  response: printerSchema, status: 200, versioned: true,
})
export const retirePrinter = operation({
  id: 'retirePrinter', method: 'post', path: `${path}/:printerId/retire`, summary: 'Retire a printer', params, response: printerSchema, status: 200, versioned: true,
})
export const restorePrinter = operation({
  id: 'restorePrinter', method: 'post', path: `${path}/:printerId/restore`, summary: 'Restore a retired printer', params, response: printerSchema, status: 200, versioned: true,
})
