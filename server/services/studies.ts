import { defaultFilmSettings, type NewStudy, type Study, type StudyChange } from '#shared/contracts/studies.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import { lockStudyForReadings } from '../repositories/film-readings.ts'
import { readPairing } from '../repositories/pairings.ts'
import { readPrinter } from '../repositories/printers.ts'
import { readLot, readResin } from '../repositories/resins.ts'
import { changeStudy, insertStudy, readStudy } from '../repositories/studies.ts'
import type { ShopActor } from './actor.ts'
import { checkInUse, refusedField } from './field-refusals.ts'
import { versionedThing } from './versioned-thing.ts'

/** A lot belongs to the resin of the pairing, or the study would speak of another resin than it says. */
async function checkLot(database: Executor, shopId: string, lotId: string, resinId: string): Promise<void> {
  const lot = checkInUse(await readLot(database, { shopId, id: lotId }), 'lot')
  if (lot.resinId !== resinId) throw refusedField('lotId', `Lot ${lot.code} is of ${lot.resinName}, not of the resin of this study.`)
}

export const studiesOf = (dependencies: Dependencies) =>
  versionedThing(dependencies, {
    word: 'study', read: readStudy, change: changeStudy, constraints: {},
    insert: (database, key, values: NewStudy) => insertStudy(database, key, { ...values, film: defaultFilmSettings }),
    async checkNew(database, actor: ShopActor, values) {
      const pairing = checkInUse(await readPairing(database, { shopId: actor.shopId, id: values.pairingId }), 'pairing')
      for (const thing of [await readPrinter(database, { shopId: actor.shopId, id: pairing.printerId }), await readResin(database, { shopId: actor.shopId, id: pairing.resinId })]) {
        if (thing !== null && thing.retiredAt !== null) throw refusedField('pairingId', `${thing.name} is retired. Restore it first, or choose another pairing.`)
      }
      if (values.lotId !== null) await checkLot(database, actor.shopId, values.lotId, pairing.resinId)
    },
    async checkChange(database, actor, before: Study, change: StudyChange) {
      // A lot that was retired since may stay: the films were made with it.
      if (change.lotId !== undefined && change.lotId !== null && change.lotId !== before.lotId) await checkLot(database, actor.shopId, change.lotId, before.resinId)
      if (change.exposureKind === undefined || change.exposureKind === before.exposureKind) return
      const unit = before.exposureKind === 'seconds' ? 'seconds' : 'mJ/cm²'
      if (before.film.plan !== null && change.film?.plan !== null) throw refusedField('exposureKind', `The film plan of this study is in ${unit}. Remove the plan first, then change the unit.`)
      // Under the lock of those who save readings: none can slip in between this look and the change.
      await lockStudyForReadings(database, { shopId: actor.shopId, studyId: before.id })
      const count = (await readStudy(database, { shopId: actor.shopId, id: before.id }))?.filmReadingCount ?? 0
      if (count > 0) {
        throw refusedField('exposureKind', `This study holds ${count} ${count === 1 ? 'reading' : 'readings'} in ${unit}; their numbers would mean something else. Open another study instead.`)
      }
    },
  })
