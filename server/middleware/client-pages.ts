import { join } from 'node:path'
import express, { Router } from 'express'

/** Serves the built client; every page address that is no file answers the one HTML document. */
export function clientPages(folder: string): Router {
  const router = Router()
  // Names under /assets carry a hash of their content.
  router.use('/assets', express.static(join(folder, 'assets'), { immutable: true, maxAge: '365d', fallthrough: false }))
  router.use(express.static(folder, { index: false, maxAge: '5m' }))
  router.get('/{*page}', (request, response, next) => {
    if (/\.[a-z0-9]{1,5}$/i.test(request.path)) return next()
    response.setHeader('Cache-Control', 'no-cache')
    response.sendFile(join(folder, 'index.html'))
  })
  return router
}
