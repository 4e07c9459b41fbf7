import { advise, beliefAfter, bestStepOf, curvesOf, defaultPlannerPrior, jointShareAt, updateBelief, type Care, type PlannedCoupon } from '#shared/planner/index.ts'
import { randomNormal, type RandomSource } from '#shared/stats/index.ts'

export const coarseCoupon: PlannedCoupon = { id: 'coarse', minutes: 10, millilitres: 8, mustFormCount: 4, mustStayOpenCount: 4, coarse: true, slopeShare: 0.5, misreadShare: 0.06, printSpread: 0.5 }
export const fineCoupon: PlannedCoupon = { id: 'fine', minutes: 40, millilitres: 20, mustFormCount: 10, mustStayOpenCount: 10, coarse: false, slopeShare: 1, misreadShare: 0.01, printSpread: 0.3 }

const stepSeconds = 0.1
const start = 2
/** True shift of the coarse coupon: a little less than the planner allows for. */
const coarseBiasSd = 0.03

export interface PlannerResult {
  readonly minutes: number
  readonly prints: number
  readonly withinOneStep: number
  readonly joint: number
  readonly loss: number
  readonly claimed: number
}

/**
 * Runs the planner on truths drawn from its own family of curves: how many minutes it needs, and how good its step is.
 *
 * @param options.centreSd - standard deviation of the true centre about the guess: 0.3 from elsewhere, 0.1 from a film curve
 */
export function runPlanner(options: { readonly sets: number; readonly centreSd: number; readonly care: Care; readonly random: RandomSource }): PlannerResult {
  const { sets, centreSd, care, random } = options
  const total = { minutes: 0, prints: 0, withinOneStep: 0, joint: 0, loss: 0, claimed: 0 }
  for (let set = 0; set < sets; set++) {
    const z = Float64Array.from({ length: 5 }, () => randomNormal(random))
    const drawn = curvesOf({ ...defaultPlannerPrior, guess: start, guessLogSd: 1e-9, coarseBiasSd }, z, 0)
    const centre = centreSd * randomNormal(random)
    const truth = { ...drawn, formEdge: drawn.formEdge + centre, openEdge: drawn.openEdge + centre }
    const rightStep = bestStepOf(truth, stepSeconds)
    const best = jointShareAt(truth, Math.log(rightStep * stepSeconds))
    let belief = beliefAfter({ prior: { ...defaultPlannerPrior, guess: start, guessLogSd: centreSd }, prints: [], random })
    for (;;) {
      const advice = advise({ belief, coupons: [coarseCoupon, fineCoupon], stepSeconds, care })
      if (advice.kind !== 'print') {
        const step = Math.round(advice.bestExposure / stepSeconds)
        const joint = jointShareAt(truth, Math.log(step * stepSeconds))
        total.withinOneStep += Math.abs(step - rightStep) <= 1 ? 1 : 0
        total.joint += joint
        total.loss += best - joint
        total.claimed += advice.probabilityWithinOneStep
        break
      }
      const { coupon, exposure } = advice.next
      const x = Math.log(exposure) - (coupon.coarse ? truth.coarseShift : 0)
      const count = (features: number, eta: number): { passed: number; total: number } => {
        const shifted = eta + coupon.printSpread * randomNormal(random)
        const chance = coupon.misreadShare / 2 + (1 - coupon.misreadShare) / (1 + Math.exp(-shifted))
        let passed = 0
        for (let i = 0; i < features; i++) if (random() < chance) passed++
        return { passed, total: features }
      }
      belief = updateBelief(belief, {
        coupon, exposure,
        mustForm: count(coupon.mustFormCount, coupon.slopeShare * truth.formSlope * (x - truth.formEdge)),
        mustStayOpen: count(coupon.mustStayOpenCount, coupon.slopeShare * truth.openSlope * (truth.openEdge - x)),
      }, random)
      total.minutes += coupon.minutes
      total.prints++
    }
  }
  return {
    minutes: total.minutes / sets, prints: total.prints / sets, withinOneStep: total.withinOneStep / sets,
    joint: total.joint / sets, loss: total.loss / sets, claimed: total.claimed / sets,
  }
}
