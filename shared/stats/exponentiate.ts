import type { Interval } from './types.ts'

/** Turns a set on ln exposure, given as distance from `shift`, into one of exposures; what overflows is unbounded. */
export function exponentiate(interval: Interval, shift = 0): Interval {
  if (interval.kind === 'unbounded') return interval
  const [low, high] = interval.kind === 'finite' ? [interval.lower, interval.upper] : interval.roots
  const lower = Math.exp(shift + low)
  const upper = Math.exp(shift + high)
  if (!(lower > 0) || !Number.isFinite(upper)) return { kind: 'unbounded' }
  return interval.kind === 'finite' ? { kind: 'finite', lower, upper } : { kind: 'exclusive', roots: [lower, upper] }
}
