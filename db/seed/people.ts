import type { Role } from '#shared/contracts/common.ts'

export interface DemoPerson {
  readonly displayName: string
  readonly email: string
  /** Open on purpose: the demo shop is for looking around, on this machine only. */
  readonly password: string
  readonly role: Role
}

/** Invented people at an address that can never receive mail (RFC 2606). */
export const demoPeople: readonly DemoPerson[] = [
  { role: 'owner', displayName: 'Ines Abendroth', email: 'ines@quillmere.example', password: 'light for the owner' },
  { role: 'engineer', displayName: 'Tomas Ferrand', email: 'tomas@quillmere.example', password: 'light for the engineer' },
  { role: 'approver', displayName: 'Ruth Okonjo', email: 'ruth@quillmere.example', password: 'light for the approver' },
  { role: 'technician', displayName: 'Milo Vancura', email: 'milo@quillmere.example', password: 'light for the technician' },
  { role: 'viewer', displayName: 'Sanna Weir', email: 'sanna@quillmere.example', password: 'light for the viewer' },
]
