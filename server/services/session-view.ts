import type { Session } from '#shared/contracts/session.ts'
import type { Dependencies } from '../dependencies.ts'
import { findUserById, listMemberships } from '../repositories/people.ts'

/** Who is signed in and where they belong, without the CSRF token, which is the browser's. */
export async function describeSession(dependencies: Dependencies, userId: string | null): Promise<Omit<Session, 'csrfToken'>> {
  const { database, mailbox, demoSignIns } = dependencies
  const found = userId === null ? null : await findUserById(database, userId)
  return {
    user: found === null ? null : { id: found.id, displayName: found.displayName, email: found.email },
    memberships: found === null ? [] : await listMemberships(database, found.id),
    mailbox: mailbox !== null,
    demoSignIns: [...demoSignIns],
  }
}
