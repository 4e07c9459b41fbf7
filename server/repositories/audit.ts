import { auditEvent } from '#db/schema/index.ts'
import type { Executor } from '../dependencies.ts'

export interface AuditEntry {
  readonly id: string
  readonly shopId: string
  readonly actorUserId: string | null
  /** Verb in the past: "created", "changed", "retired". */
  readonly action: string
  readonly thing: string
  readonly thingId: string | null
  readonly before?: unknown
  readonly after?: unknown
}

/** Writes one line of a shop's history, in the transaction of the change it tells of. */
export async function recordAudit(database: Executor, entry: AuditEntry): Promise<void> {
  await database.insert(auditEvent).values({ ...entry, before: entry.before ?? null, after: entry.after ?? null })
}
