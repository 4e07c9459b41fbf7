import type { Operation } from '#shared/contracts/operation.ts'
import * as pairings from '#shared/contracts/pairings.ts'
import * as printers from '#shared/contracts/printers.ts'
import * as resins from '#shared/contracts/resins.ts'
import * as studies from '#shared/contracts/studies.ts'
import { queryClient } from './query-client.ts'
import { call } from './call.ts'

export { pairings, printers, resins, studies }

/** Retires or restores and lets every list know. */
export async function changeLife(operation: Operation, params: Readonly<Record<string, string>>, baseVersion: number): Promise<unknown> {
  const changed: unknown = await call(operation, { params, baseVersion } as Parameters<typeof call<Operation>>[1])
  await queryClient.invalidateQueries()
  return changed
}
