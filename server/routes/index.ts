import type { Router } from 'express'
import type { Dependencies } from '../dependencies.ts'
import { Binder } from './binder.ts'

/** Every feature's routes. The order does not matter: paths are disjoint. */
export function bindRoutes(router: Router, dependencies: Dependencies): Binder {
  const binder = new Binder(router, dependencies)
  return binder
}
