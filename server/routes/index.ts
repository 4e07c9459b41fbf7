import type { Router } from 'express'
import { operations } from '#shared/contracts/index.ts'
import type { Dependencies } from '../dependencies.ts'
import { benchRoutes } from './bench.ts'
import { Binder } from './binder.ts'
import { developmentRoutes } from './development.ts'
import { filmExportRoutes } from './film-exports.ts'
import { filmImportRoutes } from './film-imports.ts'
import { filmRoutes } from './film.ts'
import { memberRoutes } from './members.ts'
import { openApiRoute } from './openapi.ts'
import { sessionRoutes } from './session.ts'
import { thingRoutes } from './things.ts'

/** Every feature's routes. The order does not matter: paths are disjoint. */
export function bindRoutes(router: Router, dependencies: Dependencies): Binder {
  const binder = new Binder(router, dependencies)
  sessionRoutes(binder)
  memberRoutes(binder)
  developmentRoutes(binder)
  thingRoutes(binder)
  benchRoutes(binder)
  filmRoutes(binder)
  filmImportRoutes(binder)
  filmExportRoutes(binder)
  openApiRoute(router)
  binder.checkComplete(operations)
  return binder
}
