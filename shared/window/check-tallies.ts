import { StatsError } from '../stats/types.ts'
import type { Tally } from './types.ts'

/**
 * Refuses tallies that cannot be meant, and leaves out those where nothing was judged.
 *
 * @throws {StatsError} `bad-tally`
 */
export function checkTallies(tallies: readonly Tally[]): readonly Tally[] {
  for (const [i, tally] of tallies.entries()) {
    const say = (what: string) => new StatsError('bad-tally', `tally ${i + 1}: ${what}`)
    if (!(tally.exposure > 0) || !Number.isFinite(tally.exposure)) throw say(`exposure must be above zero, got ${tally.exposure}`)
    if (!Number.isInteger(tally.total) || tally.total < 0) throw say(`total must be a whole number, got ${tally.total}`)
    if (!Number.isInteger(tally.passed) || tally.passed < 0 || tally.passed > tally.total) {
      throw say(`passed must be a whole number from 0 to ${tally.total}, got ${tally.passed}`)
    }
    const size = tally.sizeMicrometres
    if (size !== undefined && !(size > 0 && Number.isFinite(size))) throw say(`size must be above zero, got ${size}`)
  }
  return tallies.filter(tally => tally.total > 0)
}
