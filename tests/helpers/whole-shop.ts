import { v7 } from 'uuid'
import { filmReading, importBatch, invitation, lot, pairing, printer, resin, study } from '#db/schema/index.ts'
import { defaultFilmSettings } from '#shared/contracts/studies.ts'
import { cell, plainImportMapping } from './film-shop.ts'
import type { TestApp, TestMember } from './test-app.ts'

/** A shop with one of everything, for tests that walk over all operations. */
export interface WholeShop {
  readonly shopId: string
  readonly owner: TestMember
  /** A value for every parameter in an address. */
  readonly params: Readonly<Record<string, string>>
  /** A body that each operation takes, by its id. */
  readonly bodies: Readonly<Record<string, Readonly<Record<string, unknown>>>>
}

export async function makeWholeShop(app: TestApp, name = 'Whole shop'): Promise<WholeShop> {
  const { shopId, owner } = await app.makeShop(name)
  const [printerId, resinId, lotId, pairingId, studyId, batchId, readingId, invitationId, spareResinId] = Array.from({ length: 9 }, () => v7())
  if (!printerId || !resinId || !lotId || !pairingId || !studyId || !batchId || !readingId || !invitationId || !spareResinId) throw new Error('no ids')
  const db = app.database
  await db.insert(printer).values({
    id: printerId, shopId, name: 'Bench', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 50, plateWidthMillimetres: 120, plateDepthMillimetres: 70,
    exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60,
  })
  await db.insert(resin).values([{ id: resinId, shopId, name: 'Grey' }, { id: spareResinId, shopId, name: 'Amber' }])
  await db.insert(lot).values({ id: lotId, shopId, resinId, code: 'L-1' })
  await db.insert(pairing).values({ id: pairingId, shopId, printerId, resinId })
  await db.insert(study).values({ id: studyId, shopId, pairingId, name: 'Films', layerHeightMicrometres: 50, exposureKind: 'seconds', film: defaultFilmSettings })
  await db.insert(importBatch).values({
    id: batchId, shopId, studyId, fileName: 'films.csv', mapping: plainImportMapping, acceptedRows: 1, rejectedRows: 0, rejected: [], header: ['s', 'mm'],
  })
  await db.insert(filmReading).values({
    id: readingId, shopId, studyId, exposure: 2, exposureText: '2', replicate: 1, depthMicrometres: 400, depthText: '0.4', state: 'measured', importBatchId: batchId,
  })
  await db.insert(invitation).values({
    id: invitationId, shopId, email: `waiting-${invitationId}@quillmere.example`, role: 'viewer', tokenHash: v7().replaceAll('-', '').repeat(2), invitedByUserId: owner.userId,
    expiresAt: new Date(Date.now() + 86_400_000),
  })

  const token = 'T'.repeat(43)
  const password = 'light for everyone'
  const newPrinter = {
    name: 'Second', lightEngineWavelengthNanometres: 385, pixelSizeMicrometres: 35, plateWidthMillimetres: 130, plateDepthMillimetres: 80,
    exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60, irradianceMilliwattsPerSquareCentimetre: 3.2, notes: '',
  }
  const lotFields = { code: 'L-2', receivedOn: '2026-03-01', openedOn: null, expiresOn: '2027-03-01', notes: '' }
  const newStudy = { name: 'Second', pairingId, lotId, layerHeightMicrometres: 30, resinTemperatureCelsius: 25, notes: '', exposureKind: 'seconds' }
  return {
    shopId, owner,
    params: { shopId, printerId, resinId, lotId, pairingId, studyId, batchId, readingId, invitationId, userId: owner.userId },
    bodies: {
      signIn: { email: owner.email, password: 'not the right one' },
      signUp: { email: 'walker@quillmere.example', displayName: 'Walker', shopName: 'Walks', password },
      confirmSignUp: { token },
      requestPasswordReset: { email: 'walker@quillmere.example' },
      completePasswordReset: { token, password },
      updateAccount: { displayName: 'Renamed' },
      changePassword: { currentPassword: 'not the right one', newPassword: password },
      createShop: { name: 'Another' },
      renameShop: { name: 'Renamed' },
      changeMemberRole: { role: 'owner' },
      createInvitation: { email: 'walker@quillmere.example', role: 'viewer' },
      lookUpInvitation: { token },
      acceptInvitation: { token, newPerson: { displayName: 'Walker', password } },
      createPrinter: newPrinter,
      updatePrinter: newPrinter,
      createResin: { name: 'Second', description: 'clear', notes: '' },
      updateResin: { name: 'Third', description: 'clear', notes: '' },
      createLot: { ...lotFields, resinId },
      updateLot: lotFields,
      createPairing: { printerId, resinId: spareResinId, notes: '' },
      updatePairing: { notes: 'changed' },
      createStudy: newStudy,
      updateStudy: { name: 'Third', lotId, layerHeightMicrometres: 40, resinTemperatureCelsius: 20, notes: 'n', state: 'paused', exposureKind: 'seconds', detailTarget: null, film: defaultFilmSettings },
      saveFilmReadings: { readings: [cell({ exposure: 3 })] },
      findImportMapping: { header: ['s', 'mm'] },
    },
  }
}
