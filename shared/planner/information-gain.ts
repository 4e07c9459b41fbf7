import { countLogLikelihood, interpolateEta } from '../window/index.ts'
import type { WindowBelief } from './particles.ts'
import type { PlannedCoupon } from './types.ts'

/** Enough for a gain that is right to a few percent; the rest of the particles would only cost time. */
const particlesUsed = 800

/**
 * Mutual information, in nats, between the two counts of a print that might be made next and the best printer step.
 *
 * For each particle the chance of every pair of counts is known; averaged over the particles that share a best step it
 * is P(counts | step). Information is what knowing the step takes from the surprise of the counts.
 *
 * Source: Kontsevich & Tyler, Vision Research 39 (1999) 2729 (one-step entropy), here for counts and for the decision
 * instead of the parameters.
 */
export function informationGain(
  belief: WindowBelief,
  options: { readonly coupon: PlannedCoupon; readonly exposure: number; readonly bestSteps: Int32Array },
): number {
  const { coupon, bestSteps } = options
  const stride = Math.max(1, Math.floor(belief.curves.length / particlesUsed))
  const formTables = tablesOf(coupon, coupon.mustFormCount)
  const openTables = tablesOf(coupon, coupon.mustStayOpenCount)
  const outcomes = formTables.length * openTables.length
  const groups = new Map<number, { count: number; chances: Float64Array }>()
  const form = new Float64Array(formTables.length)
  const open = new Float64Array(openTables.length)
  const logExposure = Math.log(options.exposure)
  let used = 0
  for (let i = 0; i < belief.curves.length; i += stride) {
    const curves = belief.curves[i]
    const step = bestSteps[i]
    if (curves === undefined || step === undefined) continue
    let group = groups.get(step)
    if (group === undefined) {
      group = { count: 0, chances: new Float64Array(outcomes) }
      groups.set(step, group)
    }
    const x = logExposure - (coupon.coarse ? curves.coarseShift : 0)
    const formEta = coupon.slopeShare * curves.formSlope * (x - curves.formEdge)
    const openEta = coupon.slopeShare * curves.openSlope * (curves.openEdge - x)
    for (let r = 0; r < form.length; r++) form[r] = interpolateEta(formTables[r] ?? emptyTable, formEta)
    for (let r = 0; r < open.length; r++) open[r] = interpolateEta(openTables[r] ?? emptyTable, openEta)
    for (let r = 0, cell = 0; r < form.length; r++) {
      const chance = form[r] ?? 0
      // A count this unlikely adds nothing; skipping it halves the work.
      if (chance < 1e-7) {
        cell += open.length
        continue
      }
      for (let q = 0; q < open.length; q++, cell++) group.chances[cell] = (group.chances[cell] ?? 0) + chance * (open[q] ?? 0)
    }
    group.count++
    used++
  }
  const overall = new Float64Array(outcomes)
  let known = 0
  for (const group of groups.values()) {
    const share = group.count / used
    for (let cell = 0; cell < outcomes; cell++) {
      const chance = (group.chances[cell] ?? 0) / group.count
      overall[cell] = (overall[cell] ?? 0) + share * chance
      if (chance > 0) known += share * chance * Math.log(chance)
    }
  }
  let surprise = 0
  for (const chance of overall) if (chance > 0) surprise -= chance * Math.log(chance)
  return Math.max(0, surprise + known)
}

const emptyTable = new Float64Array(0)
const chanceTables = new Map<string, Float64Array[]>()

/** Chances (not logs) of every count of a coupon's features over the eta grid. */
function tablesOf(coupon: PlannedCoupon, total: number): Float64Array[] {
  const key = `${total}|${coupon.printSpread}|${coupon.misreadShare}`
  let tables = chanceTables.get(key)
  if (tables === undefined) {
    tables = Array.from({ length: total + 1 }, (_, passed) =>
      countLogLikelihood({ passed, total, spread: coupon.printSpread, misreadShare: coupon.misreadShare }).map(Math.exp))
    if (chanceTables.size > 40) chanceTables.clear()
    chanceTables.set(key, tables)
  }
  return tables
}
