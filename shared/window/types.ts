import type { BinomialLink } from '../stats/binomial-link.ts'
import type { Separation } from '../stats/separation.ts'

/** must-form rises with exposure; must-stay-open falls with it. */
export type FeatureKind = 'must-form' | 'must-stay-open'

/**
 * How many features of one tier passed on one print: formed, or stayed open.
 * Tallies that share a `printId` share what that print had in common.
 */
export interface Tally {
  /** Seconds or mJ/cm², above zero. */
  readonly exposure: number
  readonly sizeMicrometres?: number
  readonly passed: number
  /** Features judged: not-assessable and lost ones are left out of both numbers. */
  readonly total: number
  readonly printId?: string
}

export type { BinomialLink, Separation }
