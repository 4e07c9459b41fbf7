import * as pairing from '#shared/contracts/pairings.ts'
import * as printer from '#shared/contracts/printers.ts'
import * as resin from '#shared/contracts/resins.ts'
import * as study from '#shared/contracts/studies.ts'
import { studyList, lotList, pairingList, printerList, resinList } from '../services/lists.ts'
import { studiesOf } from '../services/studies.ts'
import { lotsOf, pairingsOf, printersOf, resinsOf } from '../services/things.ts'
import type { Binder } from './binder.ts'

/** Printers, resins, lots, pairings and studies: the same six operations each. */
export function thingRoutes(binder: Binder): void {
  const { dependencies } = binder

  const printers = printersOf(dependencies)
  binder.implementInShop(printer.listPrinters, ({ database, actor, query }) => printerList(database, actor, query))
  binder.implementInShop(printer.getPrinter, ({ actor, params }) => printers.get(actor, params.printerId))
  binder.implementInShop(printer.createPrinter, ({ database, actor, body }) => printers.create(database, actor, body))
  binder.implementInShop(printer.updatePrinter, ({ actor, params, body, baseVersion }) => printers.update(actor, params.printerId, { baseVersion, set: body }))
  binder.implementInShop(printer.retirePrinter, ({ actor, params, baseVersion }) => printers.retire(actor, params.printerId, baseVersion))
  binder.implementInShop(printer.restorePrinter, ({ actor, params, baseVersion }) => printers.restore(actor, params.printerId, baseVersion))

  const resins = resinsOf(dependencies)
  binder.implementInShop(resin.listResins, ({ database, actor, query }) => resinList(database, actor, query))
  binder.implementInShop(resin.getResin, ({ actor, params }) => resins.get(actor, params.resinId))
  binder.implementInShop(resin.createResin, ({ database, actor, body }) => resins.create(database, actor, body))
  binder.implementInShop(resin.updateResin, ({ actor, params, body, baseVersion }) => resins.update(actor, params.resinId, { baseVersion, set: body }))
  binder.implementInShop(resin.retireResin, ({ actor, params, baseVersion }) => resins.retire(actor, params.resinId, baseVersion))
  binder.implementInShop(resin.restoreResin, ({ actor, params, baseVersion }) => resins.restore(actor, params.resinId, baseVersion))

  const lots = lotsOf(dependencies)
  binder.implementInShop(resin.listLots, ({ database, actor, query }) => lotList(database, actor, query))
  binder.implementInShop(resin.getLot, ({ actor, params }) => lots.get(actor, params.lotId))
  binder.implementInShop(resin.createLot, ({ database, actor, body }) => lots.create(database, actor, body))
  binder.implementInShop(resin.updateLot, ({ actor, params, body, baseVersion }) => lots.update(actor, params.lotId, { baseVersion, set: body }))
  binder.implementInShop(resin.retireLot, ({ actor, params, baseVersion }) => lots.retire(actor, params.lotId, baseVersion))
  binder.implementInShop(resin.restoreLot, ({ actor, params, baseVersion }) => lots.restore(actor, params.lotId, baseVersion))

  const pairings = pairingsOf(dependencies)
  binder.implementInShop(pairing.listPairings, ({ database, actor, query }) => pairingList(database, actor, query))
  binder.implementInShop(pairing.getPairing, ({ actor, params }) => pairings.get(actor, params.pairingId))
  binder.implementInShop(pairing.createPairing, ({ database, actor, body }) => pairings.pair(database, actor, body))
  binder.implementInShop(pairing.updatePairing, ({ actor, params, body, baseVersion }) => pairings.update(actor, params.pairingId, { baseVersion, set: body }))
  binder.implementInShop(pairing.retirePairing, ({ actor, params, baseVersion }) => pairings.retire(actor, params.pairingId, baseVersion))
  binder.implementInShop(pairing.restorePairing, ({ actor, params, baseVersion }) => pairings.restore(actor, params.pairingId, baseVersion))

  const studies = studiesOf(dependencies)
  binder.implementInShop(study.listStudies, ({ database, actor, query }) => studyList(database, actor, query))
  binder.implementInShop(study.getStudy, ({ actor, params }) => studies.get(actor, params.studyId))
  binder.implementInShop(study.createStudy, ({ database, actor, body }) => studies.create(database, actor, body))
  binder.implementInShop(study.updateStudy, ({ actor, params, body, baseVersion }) => studies.update(actor, params.studyId, { baseVersion, set: body }))
  binder.implementInShop(study.retireStudy, ({ actor, params, baseVersion }) => studies.retire(actor, params.studyId, baseVersion))
  binder.implementInShop(study.restoreStudy, ({ actor, params, baseVersion }) => studies.restore(actor, params.studyId, baseVersion))
}
