import type { NewLot } from '#shared/contracts/resins.ts'
import type { NewPairing } from '#shared/contracts/pairings.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import { AppError } from '../errors.ts'
import { changePairing, findPairing, insertPairing, readPairing } from '../repositories/pairings.ts'
import { changePrinter, insertPrinter, readPrinter } from '../repositories/printers.ts'
import { changeLot, changeResin, insertLot, insertResin, readLot, readResin } from '../repositories/resins.ts'
import type { ShopActor } from './actor.ts'
import { versionedThing, type ConstraintMeaning } from './versioned-thing.ts'

const taken = (word: string, field: string): ConstraintMeaning => ({
  code: 'name-taken', field, detail: `Another ${word} in use has this ${field} already. Choose another, or retire the other one.`,
})

/** Refuses a thing that another shop owns, or that does not exist: to the caller both are the same. */
function noSuch(word: string, field: string): AppError {
  const detail = `There is no such ${word} in this shop.`
  return new AppError('validation-failed', { detail, fields: [{ path: `body.${field}`, sentence: detail }] })
}

export const printersOf = (dependencies: Dependencies) =>
  versionedThing(dependencies, {
    word: 'printer', read: readPrinter, insert: insertPrinter, change: changePrinter,
    constraints: { printer_name_unique: taken('printer', 'name') },
    async checkChange(_database, _actor, before, change: Parameters<typeof changePrinter>[2]['set']) {
      const min = change.exposureSecondsMin ?? before.exposureSecondsMin
      const max = change.exposureSecondsMax ?? before.exposureSecondsMax
      if (min < max) return
      const detail = 'The longest exposure must be above the shortest.'
      throw new AppError('validation-failed', { detail, fields: [{ path: 'body.exposureSecondsMax', sentence: detail }] })
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
      if ((await readResin(database, { shopId: actor.shopId, id: values.resinId })) === null) throw noSuch('resin', 'resinId')
    },
  })

export function pairingsOf(dependencies: Dependencies) {
  const things = versionedThing(dependencies, {
    word: 'pairing', read: readPairing, insert: insertPairing, change: changePairing, constraints: {},
    async checkNew(database, actor, values: NewPairing) {
      if ((await readPrinter(database, { shopId: actor.shopId, id: values.printerId })) === null) throw noSuch('printer', 'printerId')
      if ((await readResin(database, { shopId: actor.shopId, id: values.resinId })) === null) throw noSuch('resin', 'resinId')
    },
  })
  return {
    ...things,
    /** Pairs a printer with a resin; two that are paired already answer as they are, a retired pairing comes back. */
    async pair(database: Executor, actor: ShopActor, values: NewPairing) {
      const known = await findPairing(database, actor.shopId, values)
      if (known === null) return things.create(database, actor, values)
      return known.retiredAt === null ? known : things.restore(actor, known.id, known.version)
    },
  }
}
