import type { FeatureKind, Tally } from './types.ts'

/** One print with at most half passed and one with at least half. */
export function bracketedBy(tallies: readonly Tally[]): boolean {
  const shares = tallies.map(tally => tally.passed / tally.total)
  return shares.some(share => share <= 0.5) && shares.some(share => share >= 0.5)
}

/** Where the missing side lies. */
export function directionOf(tallies: readonly Tally[], kind: FeatureKind): 'lower' | 'higher' | 'none' {
  if (tallies.length === 0 || bracketedBy(tallies)) return 'none'
  const allPass = tallies.every(tally => tally.passed / tally.total > 0.5)
  return allPass === (kind === 'must-form') ? 'lower' : 'higher'
}
