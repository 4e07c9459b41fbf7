/** What every part of the seed needs: who, when, and where ids come from. */
export interface SeedContext {
  readonly shopId: string
  /** The moment of seeding: dates of the demo shop lie around it. */
  readonly now: Date
  /** uuid v7 */
  readonly newId: () => string
  readonly userIds: { readonly engineer: string; readonly technician: string }
}

const dayMilliseconds = 86_400_000

export const daysFrom = (now: Date, days: number): Date => new Date(now.getTime() + days * dayMilliseconds)

/** Calendar date some days from now, as yyyy-mm-dd in UTC. */
export const dateOf = (now: Date, days: number): string => daysFrom(now, days).toISOString().slice(0, 10)
