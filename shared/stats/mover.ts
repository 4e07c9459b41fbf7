import type { Interval } from './types.ts'

/** A value with an interval that need not be symmetric. */
export interface Ranged {
  readonly value: number
  readonly interval: Interval
}

/**
 * Interval of a sum of independent estimates from their own intervals (method of variance estimates recovery:
 * Zou & Donner, Stat. Med. 27 (2008) 1693).
 *
 * @returns unbounded as soon as one part is not finite
 * @example
 * moverSum([{ value: 3, interval: { kind: 'finite', lower: 2, upper: 4 } }, { value: 4, interval: { kind: 'finite', lower: 3, upper: 5 } }])
 */
export function moverSum(parts: readonly Ranged[]): Interval {
  let value = 0
  let below = 0
  let above = 0
  for (const part of parts) {
    if (part.interval.kind !== 'finite') return { kind: 'unbounded' }
    value += part.value
    below += (part.value - part.interval.lower) ** 2
    above += (part.interval.upper - part.value) ** 2
  }
  return { kind: 'finite', lower: value - Math.sqrt(below), upper: value + Math.sqrt(above) }
}

/** The same estimate with its sign turned: for differences by `moverSum`. */
export function negate(part: Ranged): Ranged {
  const { interval } = part
  return {
    value: -part.value,
    interval: interval.kind === 'finite' ? { kind: 'finite', lower: -interval.upper, upper: -interval.lower } : interval,
  }
}
