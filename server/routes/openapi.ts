import type { Router } from 'express'
import { operations } from '#shared/contracts/index.ts'
import { openApiDocument } from '../services/openapi.ts'
import { access } from './access.ts'

/** GET /api/openapi.json: made once, on the first call. */
export function openApiRoute(router: Router): void {
  let document: unknown = null
  router.get('/api/openapi.json', (_request, response) => {
    document ??= openApiDocument(operations, operation => {
      const rights = access[operation.id]
      return Array.isArray(rights) ? `For members of the shop with one of these roles: ${rights.join(', ')}.` : `For: ${String(rights)}.`
    })
    response.json(document)
  })
}
