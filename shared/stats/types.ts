/**
 * A set of values that the data do not rule out.
 *
 * `finite`: between two ends. `exclusive`: outside two roots (the data rule out only what lies between them).
 * `unbounded`: everything, or everything on one side. Only a finite one may be shown as an interval; the others are
 * sentences.
 */
export type Interval =
  | { readonly kind: 'finite'; readonly lower: number; readonly upper: number }
  | { readonly kind: 'exclusive'; readonly roots: readonly [number, number] }
  | { readonly kind: 'unbounded' }

/** A number with how sure it is. `standardError` is infinite where no degree of freedom is left to tell. */
export interface Estimate {
  readonly value: number
  readonly standardError: number
  readonly interval: Interval
}

/** What the data cannot tell is an ordinary answer with a reason, never NaN and never a hopeful number. */
export interface Refused<Reason extends string = string> {
  readonly kind: 'refused'
  readonly reason: Reason
  /** A sentence that says what to do about it. */
  readonly detail: string
}

/** The caller's mistake: wrong lengths, values that cannot be meant. */
export class StatsError extends Error {
  readonly code: string

  constructor(code: string, message: string) {
    super(message)
    this.name = 'StatsError'
    this.code = code
  }
}
