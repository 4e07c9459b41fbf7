import { roles, type Role } from '#shared/contracts/common.ts'

/**
 * Who may call what: `public`, any `signed-in` person, or members of the shop with one of the roles.
 * The one table of rights: the binder enforces it, a test walks every line of it with every role and a foreign shop.
 */
export type Access = 'public' | 'signed-in' | 'development' | readonly Role[]

const everyone: readonly Role[] = roles
/** Those who keep printers, resins and studies. */
const keepers: readonly Role[] = ['owner', 'engineer']
/** Those who print, measure and enter. */
const bench: readonly Role[] = ['owner', 'engineer', 'technician']
const owner: readonly Role[] = ['owner']

export const access: Readonly<Record<string, Access>> = {
  getSession: 'public',
  signIn: 'public',
  signOut: 'public',
  signUp: 'public',
  confirmSignUp: 'public',
  requestPasswordReset: 'public',
  completePasswordReset: 'public',
  lookUpInvitation: 'public',
  acceptInvitation: 'public',
  updateAccount: 'signed-in',
  changePassword: 'signed-in',
  createShop: 'signed-in',
  listCaughtMail: 'development',

  getShop: everyone,
  renameShop: owner,
  listMembers: everyone,
  changeMemberRole: owner,
  /** The service lets everybody remove themselves; removing others is the owner's. */
  removeMember: everyone,
  listInvitations: owner,
  createInvitation: owner,
  revokeInvitation: owner,

  getBench: everyone,
  listPrinters: everyone,
  getPrinter: everyone,
  createPrinter: keepers,
  updatePrinter: keepers,
  retirePrinter: keepers,
  restorePrinter: keepers,
  listResins: everyone,
  getResin: everyone,
  createResin: keepers,
  updateResin: keepers,
  retireResin: keepers,
  restoreResin: keepers,
  listLots: everyone,
  getLot: everyone,
  createLot: bench,
  updateLot: bench,
  retireLot: keepers,
  restoreLot: keepers,
  listPairings: everyone,
  getPairing: everyone,
  createPairing: keepers,
  updatePairing: keepers,
  retirePairing: keepers,
  restorePairing: keepers,
  listStudies: everyone,
  getStudy: everyone,
  createStudy: keepers,
  updateStudy: keepers,
  retireStudy: keepers,
  restoreStudy: keepers,

  listFilmReadings: everyone,
  saveFilmReadings: bench,
  getFilmReadingHistory: everyone,
  exportFilmReadings: everyone,
  exportFilm: everyone,
  exportFilmFit: everyone,
  getFilmFit: everyone,
  importFilmReadings: bench,
  listFilmImports: everyone,
  exportRejectedRows: everyone,
  withdrawFilmImport: bench,
  restoreFilmImport: bench,
  findImportMapping: bench,
}
