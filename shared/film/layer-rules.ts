import { StatsError } from '../stats/types.ts'
import type { LayerRule, LayerRuleName } from './types.ts'

/**
 * Starting values of the rules where a shop has none of its own: all three ask about the same of a 50 µm layer at
 * Dp 100 µm. Common practice, no published source: cure depth over layer height lies between about 1.3 and 3.
 */
export const defaultRuleValues = { overcureMicrometres: 50, ratio: 2, doseRatio: 4 } as const

/** A rule by name alone takes its starting value. */
export type LayerRuleChoice = LayerRule | LayerRuleName

export type CompleteRule =
  | { readonly kind: 'constant-overcure'; readonly overcureMicrometres: number }
  | { readonly kind: 'constant-ratio'; readonly ratio: number }
  | { readonly kind: 'far-side-dose'; readonly doseRatio: number }

/**
 * Fills a rule in and checks it.
 *
 * @throws {StatsError} `rule-out-of-range`
 */
export function completeRule(choice: LayerRuleChoice): CompleteRule {
  const rule = typeof choice === 'string' ? { kind: choice } : choice
  if (rule.kind === 'constant-overcure') {
    const overcureMicrometres = ('overcureMicrometres' in rule ? rule.overcureMicrometres : undefined) ?? defaultRuleValues.overcureMicrometres
    if (!Number.isFinite(overcureMicrometres)) throw new StatsError('rule-out-of-range', `overcure must be a finite number, got ${overcureMicrometres}`)
    return { kind: 'constant-overcure', overcureMicrometres }
  }
  if (rule.kind === 'constant-ratio') {
    const ratio = ('ratio' in rule ? rule.ratio : undefined) ?? defaultRuleValues.ratio
    if (!(ratio > 0 && Number.isFinite(ratio))) throw new StatsError('rule-out-of-range', `ratio must be above zero, got ${ratio}`)
    return { kind: 'constant-ratio', ratio }
  }
  const doseRatio = ('doseRatio' in rule ? rule.doseRatio : undefined) ?? defaultRuleValues.doseRatio
  if (!(doseRatio > 0 && Number.isFinite(doseRatio))) throw new StatsError('rule-out-of-range', `dose ratio must be above zero, got ${doseRatio}`)
  return { kind: 'far-side-dose', doseRatio }
}

/**
 * Refuses a layer height that is none.
 *
 * @throws {StatsError} `layer-height-out-of-range`
 */
export function checkLayerHeight(layerHeightMicrometres: number): void {
  if (!(layerHeightMicrometres > 0 && Number.isFinite(layerHeightMicrometres))) {
    throw new StatsError('layer-height-out-of-range', `layer height must be above zero, got ${layerHeightMicrometres}`)
  }
}
