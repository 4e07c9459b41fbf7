/** Every operation of the API, by its id: what the server must implement and the OpenAPI document lists. */
import * as bench from './bench.ts'
import * as development from './development.ts'
import * as film from './film.ts'
import * as filmImports from './film-imports.ts'
import * as members from './members.ts'
import type { Operation } from './operation.ts'
import * as pairings from './pairings.ts'
import * as printers from './printers.ts'
import * as resins from './resins.ts'
import * as session from './session.ts'
import * as studies from './studies.ts'

const modules = [session, members, development, printers, resins, pairings, studies, film, filmImports, bench]

function isOperation(value: unknown): value is Operation {
  return typeof value === 'object' && value !== null && 'method' in value && 'path' in value && 'status' in value
}

export const operations: readonly Operation[] = modules.flatMap(module => Object.values(module).filter(isOperation))
