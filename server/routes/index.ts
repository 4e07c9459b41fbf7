import type { Router } from 'express'
import type { Dependencies } from '../dependencies.ts'
import { Binder } from './binder.ts'
import { filmImportRoutes } from './film-imports.ts'
import { filmRoutes } from './film.ts'

/** Every feature's routes. The order does not matter: paths are disjoint. */
export function bindRoutes(router: Router, dependencies: Dependencies): Binder {
  const binder = new Binder(router, dependencies)
  filmRoutes(binder)
  filmImportRoutes(binder)
  return binder
}
