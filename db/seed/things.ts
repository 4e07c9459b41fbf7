import type { Database } from '../client.ts'
import { lot, pairing, printer, resin } from '../schema/index.ts'
import { daysFrom, dateOf, type SeedContext } from './context.ts'

type Transaction = Pick<Database, 'insert'>

/** Printers, resins, lots and pairings of the demo shop; answers the ids that the studies need. */
export async function seedThings(transaction: Transaction, context: SeedContext) {
  const { shopId, newId, now } = context
  const since = (days: number) => ({ createdAt: daysFrom(now, -days), updatedAt: daysFrom(now, -days) })
  const ids = {
    north: newId(), south: newId(), wide: newId(), corner: newId(),
    grey: newId(), clear: newId(), amber: newId(), sand: newId(),
    greyLot: newId(), clearLot: newId(), amberLot: newId(), sandLot: newId(),
    northGrey: newId(), southGrey: newId(), cornerClear: newId(), wideAmber: newId(), southSand: newId(),
  }

  await transaction.insert(printer).values([
    {
      id: ids.north, name: 'North bench', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 40, plateWidthMillimetres: 150, plateDepthMillimetres: 80,
      exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60, irradianceMilliwattsPerSquareCentimetre: 3.4,
      notes: 'Film on the vat changed with the last lot. Warm up ten minutes before films.',
    },
    {
      id: ids.south, name: 'South bench', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 50, plateWidthMillimetres: 140, plateDepthMillimetres: 78,
      exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60, irradianceMilliwattsPerSquareCentimetre: 2.5, notes: 'Older lamp: needs longer than the north bench for the same resin.',
    },
    {
      id: ids.wide, name: 'Wide plate', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 70, plateWidthMillimetres: 260, plateDepthMillimetres: 150,
      exposureStepSeconds: 0.1, exposureSecondsMin: 1, exposureSecondsMax: 120, irradianceMilliwattsPerSquareCentimetre: null, notes: 'Never metered: work in seconds here.',
    },
    {
      id: ids.corner, name: 'Corner cabinet', lightEngineWavelengthNanometres: 385, pixelSizeMicrometres: 30, plateWidthMillimetres: 90, plateDepthMillimetres: 50,
      exposureStepSeconds: 0.05, exposureSecondsMin: 0.2, exposureSecondsMax: 30, irradianceMilliwattsPerSquareCentimetre: 6.1, notes: '',
    },
    {
      id: newId(), name: 'Stair room', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 100, plateWidthMillimetres: 110, plateDepthMillimetres: 60,
      exposureStepSeconds: 0.5, exposureSecondsMin: 1, exposureSecondsMax: 60, irradianceMilliwattsPerSquareCentimetre: null, notes: 'Lamp gave up.', retiredAt: daysFrom(now, -60),
    },
  ].map(values => ({ ...values, shopId, ...since(300) })))

  await transaction.insert(resin).values([
    { id: ids.grey, name: 'Everyday grey', description: 'Grey, lightly filled. Most parts.', notes: 'Stir before pouring: the filler settles over a weekend.' },
    { id: ids.clear, name: 'Window clear', description: 'Clear, thin, for light guides.', notes: 'Cures deep; watch closed channels.' },
    { id: ids.amber, name: 'Tough amber', description: 'Amber, for clips and hinges.', notes: '' },
    { id: ids.sand, name: 'Model sand', description: 'Opaque beige, for show models.', notes: '' },
  ].map(values => ({ ...values, shopId, ...since(290) })))

  await transaction.insert(lot).values([
    { id: ids.greyLot, resinId: ids.grey, code: 'G-0417', receivedOn: dateOf(now, -120), openedOn: dateOf(now, -40), expiresOn: dateOf(now, 9), notes: 'About a third left.' },
    { id: newId(), resinId: ids.grey, code: 'G-0455', receivedOn: dateOf(now, -6), openedOn: null, expiresOn: dateOf(now, 310), notes: 'Next in line.' },
    { id: ids.clearLot, resinId: ids.clear, code: 'C-0093', receivedOn: dateOf(now, -70), openedOn: dateOf(now, -30), expiresOn: dateOf(now, 200), notes: '' },
    { id: ids.amberLot, resinId: ids.amber, code: 'A-0212', receivedOn: dateOf(now, -90), openedOn: dateOf(now, -55), expiresOn: dateOf(now, 120), notes: '' },
    { id: ids.sandLot, resinId: ids.sand, code: 'S-0031', receivedOn: dateOf(now, -25), openedOn: dateOf(now, -3), expiresOn: dateOf(now, 260), notes: '' },
  ].map(values => ({ ...values, shopId, ...since(20) })))

  await transaction.insert(pairing).values([
    { id: ids.northGrey, printerId: ids.north, resinId: ids.grey, notes: 'The house standard.' },
    { id: ids.southGrey, printerId: ids.south, resinId: ids.grey, notes: '' },
    { id: ids.cornerClear, printerId: ids.corner, resinId: ids.clear, notes: '' },
    { id: ids.wideAmber, printerId: ids.wide, resinId: ids.amber, notes: '' },
    { id: ids.southSand, printerId: ids.south, resinId: ids.sand, notes: '' },
    { id: newId(), printerId: ids.corner, resinId: ids.amber, notes: 'Small clips. Nobody has measured films here yet.' },
  ].map(values => ({ ...values, shopId, ...since(280) })))
  return ids
}

export type ThingIds = Awaited<ReturnType<typeof seedThings>>
