import type { Dependencies, Executor } from '../dependencies.ts'
import { recordAudit, type AuditEntry } from '../repositories/audit.ts'
import { listMemberships } from '../repositories/people.ts'
import type { ShopActor } from './actor.ts'

/** Tells a shop's history what an actor did, in the transaction of the change itself. */
export function auditBy(
  dependencies: Dependencies,
  transaction: Executor,
  actor: Pick<ShopActor, 'shopId' | 'userId'>,
  entry: Omit<AuditEntry, 'id' | 'shopId' | 'actorUserId'>,
): Promise<void> {
  return recordAudit(transaction, { id: dependencies.newId(), shopId: actor.shopId, actorUserId: actor.userId, ...entry })
}

/** What people change about themselves is told in every shop that they belong to: their name stands under its records. */
export async function auditByPerson(
  dependencies: Dependencies,
  transaction: Executor,
  userId: string,
  entry: Pick<AuditEntry, 'action' | 'before' | 'after'>,
): Promise<void> {
  for (const { shopId } of await listMemberships(transaction, userId)) {
    await auditBy(dependencies, transaction, { shopId, userId }, { ...entry, thing: 'person', thingId: userId })
  }
}
