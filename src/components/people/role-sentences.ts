import type { Role } from '#shared/contracts/common.ts'

/** What each role may do, in a sentence. */
export const roleSentences: Readonly<Record<Role, string>> = {
  owner: 'Invites people, gives roles and can do everything else.',
  engineer: 'Keeps printers, resins and studies, fits and decides.',
  approver: 'Sees everything and approves settings for use.',
  technician: 'Prints, measures and enters, and adds lots.',
  viewer: 'Sees everything and changes nothing.',
}
