import type { Executor } from '../dependencies.ts'
import { listPairings } from '../repositories/pairings.ts'
import { listPrinters } from '../repositories/printers.ts'
import { listLots, listResins } from '../repositories/resins.ts'
import { listStudies } from '../repositories/studies.ts'
import type { ShopActor } from './actor.ts'

/** A list of the actor's shop: the query is the caller's, the shop never is. */
const inShop = <Query, Page>(list: (database: Executor, shopId: string, query: Query) => Promise<Page>) =>
  (database: Executor, actor: ShopActor, query: Query): Promise<Page> => list(database, actor.shopId, query)

export const printerList = inShop(listPrinters)
export const resinList = inShop(listResins)
export const lotList = inShop(listLots)
export const pairingList = inShop(listPairings)
export const studyList = inShop(listStudies)
