import { z } from 'zod'
import { dateSchema, idSchema, lifecycleSchema, listStateSchema, nameSchema, notesSchema, pageQuerySchema, pageSchema, shopParamsSchema } from './common.ts'
import { operation } from './operation.ts'

const resinFields = {
  name: nameSchema,
  /** What a person sees or must know: "grey, filled", "clear, castable". */
  description: z.string().max(400, 'At most 400 characters.'),
  notes: notesSchema,
}
export const newResinSchema = z.strictObject(resinFields)
export const resinSchema = lifecycleSchema.extend({ ...resinFields, lotCount: z.int() })
export type Resin = z.infer<typeof resinSchema>
export type NewResin = z.infer<typeof newResinSchema>

const resinParams = shopParamsSchema.extend({ resinId: idSchema })
const resins = '/api/shops/:shopId/resins'

export const listResins = operation({
  id: 'listResins', method: 'get', path: resins, summary: 'The resins of a shop', params: shopParamsSchema,
  query: pageQuerySchema.extend({
    q: z.string().max(120).optional(), state: listStateSchema,
    sort: z.enum(['name', '-name', 'updatedAt', '-updatedAt']).default('name'),
  }),
  response: pageSchema(resinSchema), status: 200,
})
export const getResin = operation({
  id: 'getResin', method: 'get', path: `${resins}/:resinId`, summary: 'One resin', params: resinParams, response: resinSchema, status: 200,
})
export const createResin = operation({
  id: 'createResin', method: 'post', path: resins, summary: 'Add a resin', params: shopParamsSchema, body: newResinSchema,
  response: resinSchema, status: 201, retrySafe: true,
})
export const updateResin = operation({
  id: 'updateResin', method: 'patch', path: `${resins}/:resinId`, summary: 'Change a resin', params: resinParams,
  body: newResinSchema.partial(), response: resinSchema, status: 200, versioned: true,
})
export const retireResin = operation({
  id: 'retireResin', method: 'post', path: `${resins}/:resinId/retire`, summary: 'Retire a resin', params: resinParams, response: resinSchema, status: 200, versioned: true,
})
export const restoreResin = operation({
  id: 'restoreResin', method: 'post', path: `${resins}/:resinId/restore`, summary: 'Restore a retired resin', params: resinParams, response: resinSchema, status: 200, versioned: true,
})

const lotFields = {
  code: nameSchema,
  receivedOn: dateSchema.nullable(),
  openedOn: dateSchema.nullable(),
  expiresOn: dateSchema.nullable(),
  notes: notesSchema,
}
export const newLotSchema = z.strictObject({ ...lotFields, resinId: idSchema })
export const lotSchema = lifecycleSchema.extend({ ...lotFields, resinId: idSchema, resinName: z.string() })
export type Lot = z.infer<typeof lotSchema>
export type NewLot = z.infer<typeof newLotSchema>

const lotParams = shopParamsSchema.extend({ lotId: idSchema })
const lots = '/api/shops/:shopId/lots'

export const listLots = operation({
  id: 'listLots', method: 'get', path: lots, summary: 'The lots of a shop', params: shopParamsSchema,
  query: pageQuerySchema.extend({
    q: z.string().max(120).optional(), state: listStateSchema, resinId: idSchema.optional(),
    sort: z.enum(['code', '-code', 'receivedOn', '-receivedOn', 'expiresOn', '-expiresOn', 'updatedAt', '-updatedAt']).default('-receivedOn'),
  }),
  response: pageSchema(lotSchema), status: 200,
})
export const getLot = operation({
  id: 'getLot', method: 'get', path: `${lots}/:lotId`, summary: 'One lot', params: lotParams, response: lotSchema, status: 200,
})
export const createLot = operation({
  id: 'createLot', method: 'post', path: lots, summary: 'Add a lot', params: shopParamsSchema, body: newLotSchema,
  response: lotSchema, status: 201, retrySafe: true,
})
export const updateLot = operation({
  id: 'updateLot', method: 'patch', path: `${lots}/:lotId`, summary: 'Change a lot', params: lotParams,
  body: z.strictObject(lotFields).partial(), response: lotSchema, status: 200, versioned: true,
})
export const retireLot = operation({
  id: 'retireLot', method: 'post', path: `${lots}/:lotId/retire`, summary: 'Retire a lot', params: lotParams, response: lotSchema, status: 200, versioned: true,
})
export const restoreLot = operation({
  id: 'restoreLot', method: 'post', path: `${lots}/:lotId/restore`, summary: 'Restore a retired lot', params: lotParams, response: lotSchema, status: 200, versioned: true,
})
