import { defaultFilmSettings, type NewStudy, type Study, type StudyChange } from '#shared/contracts/studies.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import { AppError } from '../errors.ts'
import { readPairing } from '../repositories/pairings.ts'
import { readLot } from '../repositories/resins.ts'
import { changeStudy, insertStudy, readStudy } from '../repositories/studies.ts'
import type { ShopActor } from './actor.ts'
import { versionedThing } from './versioned-thing.ts'

function refused(field: string, detail: string): AppError {
  return new AppError('validation-failed', { detail, fields: [{ path: `body.${field}`, sentence: detail }] })
}

/** A lot belongs to the resin of the pairing, or the study would speak of another resin than it says. */
async function checkLot(database: Executor, shopId: string, lotId: string, resinId: string): Promise<void> {
  const lot = await readLot(database, { shopId, id: lotId })
  if (lot === null) throw refused('lotId', 'There is no such lot in this shop.')
  if (lot.resinId !== resinId) throw refused('lotId', `Lot ${lot.code} is of ${lot.resinName}, not of the resin of this study.`)
}

export const studiesOf = (dependencies: Dependencies) =>
  versionedThing(dependencies, {
    word: 'study', read: readStudy, change: changeStudy, constraints: {},
    insert: (database, key, values: NewStudy) => insertStudy(database, key, { ...values, film: defaultFilmSettings }),
    async checkNew(database, actor: ShopActor, values) {
      const pairing = await readPairing(database, { shopId: actor.shopId, id: values.pairingId })
      if (pairing === null) throw refused('pairingId', 'There is no such pairing in this shop.')
      if (values.lotId !== null) await checkLot(database, actor.shopId, values.lotId, pairing.resinId)
    },
    async checkChange(database, actor, before: Study, change: StudyChange) {
      if (change.lotId !== undefined && change.lotId !== null) await checkLot(database, actor.shopId, change.lotId, before.resinId)
      if (change.exposureKind !== undefined && change.exposureKind !== before.exposureKind && before.filmReadingCount > 0) {
        throw refused('exposureKind', `This study holds ${before.filmReadingCount} readings in ${before.exposureKind === 'seconds' ? 'seconds' : 'mJ/cm²'}; their numbers would mean something else. Open another study instead.`)
      }
    },
  })
