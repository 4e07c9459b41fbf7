import type { NewLot } from '#shared/contracts/resins.ts'
import type { NewPairing, Pairing } from '#shared/contracts/pairings.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import { AppError } from '../errors.ts'
import { changePairing, findPairing, insertPairing, readPairing } from '../repositories/pairings.ts'
import { changePrinter, insertPrinter, readPrinter } from '../repositories/printers.ts'
import { changeLot, changeResin, insertLot, insertResin, readLot, readResin } from '../repositories/resins.ts'
import type { ShopActor } from './actor.ts'
import { checkInUse, refusedField } from './field-refusals.ts'
import { versionedThing, type ConstraintMeaning } from './versioned-thing.ts'

const taken = (word: string, field: string): ConstraintMeaning => ({
  code: 'name-taken', field, detail: `Another ${word} in use has this ${field} already. Choose another, or retire the other one.`,
})


export const printersOf = (dependencies: Dependencies) =>
  versionedThing(dependencies, {
    word: 'printer', read: readPrinter, insert: insertPrinter, change: changePrinter,
    constraints: { printer_name_unique: taken('printer', 'name') },
    async checkChange(_database, _actor, before, change: Parameters<typeof changePrinter>[2]['set']) {
      const min = change.exposureSecondsMin ?? before.exposureSecondsMin
      const max = change.exposureSecondsMax ?? before.exposureSecondsMax
      if (min < max) return
      throw refusedField('exposureSecondsMax', 'The longest exposure must be above the shortest.')
    },
  })

export const resinsOf = (dependencies: Dependencies) =>
  versionedThing(dependencies, {
    word: 'resin', read: readResin, insert: insertResin, change: changeResin,
    constraints: { resin_name_unique: taken('resin', 'name') },
  })

export const lotsOf = (dependencies: Dependencies) =>
  versionedThing(dependencies, {
    word: 'lot', read: readLot, insert: insertLot, change: changeLot,
    constraints: { lot_code_unique: taken('lot of this resin', 'code') },
    async checkNew(database, actor, values: NewLot) {
      checkInUse(await readResin(database, { shopId: actor.shopId, id: values.resinId }), 'resin')
    },
  })

export function pairingsOf(dependencies: Dependencies) {
  const things = versionedThing(dependencies, {
    word: 'pairing', read: readPairing, insert: insertPairing, change: changePairing,
    constraints: { pairing_unique: { code: 'conflict', detail: 'The two are paired already.' } },
    async checkNew(database, actor, values: NewPairing) {
      checkInUse(await readPrinter(database, { shopId: actor.shopId, id: values.printerId }), 'printer')
      checkInUse(await readResin(database, { shopId: actor.shopId, id: values.resinId }), 'resin')
    },
  })

  /** The pairing that is there, in use again. */
  async function known(database: Executor, actor: ShopActor, values: NewPairing): Promise<Pairing | null> {
    const found = await findPairing(database, actor.shopId, values)
    return found === null || found.retiredAt === null ? found : things.restore(actor, found.id, found.version, database)
  }

  return {
    ...things,
    /** Pairs a printer with a resin; two that are paired already answer as they are, a retired pairing comes back. */
    async pair(database: Executor, actor: ShopActor, values: NewPairing): Promise<Pairing> {
      try {
        return (await known(database, actor, values)) ?? (await things.create(database, actor, values))
      } catch (error) {
        // Somebody else paired or restored the two at the same moment: what they made is the answer.
        const overtaken = error instanceof AppError && (error.code === 'conflict' || error.code === 'stale-edit')
        const theirs = overtaken ? await known(database, actor, values) : null
        if (theirs === null) throw error
        return theirs
      }
    },
  }
}
