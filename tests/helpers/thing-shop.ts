import * as pairings from '#shared/contracts/pairings.ts'
import * as printers from '#shared/contracts/printers.ts'
import * as resins from '#shared/contracts/resins.ts'
import * as studies from '#shared/contracts/studies.ts'
import type { TestMember } from './test-app.ts'

export const newPrinter = {
  name: 'North', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 50, plateWidthMillimetres: 120, plateDepthMillimetres: 70,
  exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60, irradianceMilliwattsPerSquareCentimetre: null, notes: '',
} as const
export const newLot = { receivedOn: null, openedOn: null, expiresOn: null, notes: '' } as const

/** Adds things to one shop through the API, each under a name of its own unless the test says one. */
export function thingsBy(owner: TestMember) {
  const { agent, shopId } = owner
  const params = { shopId }
  let count = 0
  const things = {
    printer: (change: Partial<printers.NewPrinter> = {}) => agent.ok(printers.createPrinter, { params, body: { ...newPrinter, name: `Printer ${++count}`, ...change } }),
    resin: (change: Partial<resins.NewResin> = {}) => agent.ok(resins.createResin, { params, body: { name: `Resin ${++count}`, description: '', notes: '', ...change } }),
    lot: (resinId: string, change: Partial<resins.NewLot> = {}) => agent.ok(resins.createLot, { params, body: { ...newLot, code: `Lot ${++count}`, resinId, ...change } }),
    async pairing() {
      const [printer, resin] = [await things.printer(), await things.resin()]
      return agent.ok(pairings.createPairing, { params, body: { printerId: printer.id, resinId: resin.id } })
    },
    study: (pairingId: string, change: Partial<studies.NewStudy> = {}) =>
      agent.ok(studies.createStudy, {
        params, body: { name: `Study ${++count}`, pairingId, lotId: null, layerHeightMicrometres: 50, resinTemperatureCelsius: null, notes: '', ...change },
      }),
  }
  return things
}
