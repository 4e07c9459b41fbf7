import { z } from 'zod'
import { idSchema, lifecycleSchema, listStateSchema, notesSchema, pageQuerySchema, pageSchema, shopParamsSchema } from './common.ts'
import { operation } from './operation.ts'

export const newPairingSchema = z.strictObject({ printerId: idSchema, resinId: idSchema, notes: notesSchema.default('') })
export const pairingSchema = lifecycleSchema.extend({
  printerId: idSchema,
  printerName: z.string(),
  resinId: idSchema,
  resinName: z.string(),
  notes: z.string(),
  studyCount: z.int(),
})
export type Pairing = z.infer<typeof pairingSchema>
export type NewPairing = z.infer<typeof newPairingSchema>

const params = shopParamsSchema.extend({ pairingId: idSchema })
const path = '/api/shops/:shopId/pairings'

export const listPairings = operation({
  id: 'listPairings', method: 'get', path, summary: 'The pairings of a shop', params: shopParamsSchema,
  query: pageQuerySchema.extend({
    q: z.string().max(120).optional(), state: listStateSchema, printerId: idSchema.optional(), resinId: idSchema.optional(),
    sort: z.enum(['printerName', '-printerName', 'resinName', '-resinName', 'updatedAt', '-updatedAt']).default('printerName'),
  }),
  response: pageSchema(pairingSchema), status: 200,
})
export const getPairing = operation({
  id: 'getPairing', method: 'get', path: `${path}/:pairingId`, summary: 'One pairing', params, response: pairingSchema, status: 200,
})
export const createPairing = operation({
  id: 'createPairing', method: 'post', path, summary: 'Pair a printer with a resin; an existing pairing is answered as it is', params: shopParamsSchema,
  body: newPairingSchema, response: pairingSchema, status: 201, retrySafe: true,
})
export const updatePairing = operation({
  id: 'updatePairing', method: 'patch', path: `${path}/:pairingId`, summary: 'Change a pairing', params, body: z.strictObject({ notes: notesSchema }),
  response: pairingSchema, status: 200, versioned: true,
})
export const retirePairing = operation({
  id: 'retirePairing', method: 'post', path: `${path}/:pairingId/retire`, summary: 'Retire a pairing', params, response: pairingSchema, status: 200, versioned: true,
})
export const restorePairing = operation({
  id: 'restorePairing', method: 'post', path: `${path}/:pairingId/restore`, summary: 'Restore a retired pairing', params, response: pairingSchema, status: 200, versioned: true,
})
