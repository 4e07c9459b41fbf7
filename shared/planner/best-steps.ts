import type { WindowBelief } from './particles.ts'
import type { WindowCurves } from './window-model.ts'

const logistic = (eta: number): number => 1 / (1 + Math.exp(-eta))

/** Chance that a must-form feature forms and a must-stay-open one stays open, at ln exposure x. */
export function jointShareAt(curves: WindowCurves, x: number): number {
  return logistic(curves.formSlope * (x - curves.formEdge)) * logistic(curves.openSlope * (curves.openEdge - x))
}

/** ln exposure of the largest joint share: where the two curves' relative slopes cancel. */
export function optimumOf(curves: WindowCurves): number {
  const middle = (curves.formEdge + curves.openEdge) / 2
  const reach = Math.abs(curves.openEdge - curves.formEdge) + 3 / Math.min(curves.formSlope, curves.openSlope)
  let low = middle - reach
  let high = middle + reach
  for (let i = 0; i < 30; i++) {
    const x = (low + high) / 2
    const rise = curves.formSlope * logistic(-curves.formSlope * (x - curves.formEdge))
    const fall = curves.openSlope * logistic(-curves.openSlope * (curves.openEdge - x))
    if (rise > fall) low = x
    else high = x
  }
  return (low + high) / 2
}

/** Number of the printer step with the largest joint share for one pair of curves. */
export function bestStepOf(curves: WindowCurves, stepSeconds: number): number {
  const exact = Math.exp(optimumOf(curves)) / stepSeconds
  const below = Math.max(1, Math.floor(exact))
  return jointShareAt(curves, Math.log(below * stepSeconds)) >= jointShareAt(curves, Math.log((below + 1) * stepSeconds)) ? below : below + 1
}

export interface StepSummary {
  /** Number of printer steps of the exposure to use. */
  readonly best: number
  readonly bestExposure: number
  /** Mean joint pass probability there. */
  readonly joint: number
  /** What it gives away, on average, against the truly best step. */
  readonly expectedLoss: number
  readonly probabilityWithinOneStep: number
  /** Best step of each particle. */
  readonly ofParticles: Int32Array
}

/** The step to use now, and how sure that is. */
export function summariseSteps(belief: WindowBelief, stepSeconds: number, limits: { readonly min: number; readonly max: number }): StepSummary {
  const { curves } = belief
  const bound = (step: number) => Math.min(limits.max, Math.max(limits.min, step))
  const ofParticles = Int32Array.from(curves, pair => bound(bestStepOf(pair, stepSeconds)))
  const sorted = ofParticles.slice().sort()
  const at = (share: number) => sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))] ?? 1
  const first = bound(at(0.005) - 2)
  const last = bound(at(0.995) + 2)
  const thin = Math.max(1, Math.ceil((last - first) / 200))
  const meanJointAt = (step: number) => {
    const x = Math.log(step * stepSeconds)
    return curves.reduce((sum, pair) => sum + jointShareAt(pair, x), 0) / curves.length
  }
  let best = first
  let joint = -1
  const consider = (step: number) => {
    const mean = meanJointAt(step)
    if (mean > joint + 1e-12) {
      joint = mean
      best = step
    }
  }
  for (let step = first; step <= last; step += thin) consider(step)
  if (thin > 1) for (let step = bound(best - thin + 1); step < bound(best + thin); step++) consider(step)
  let ideal = 0
  let near = 0
  for (const [i, pair] of curves.entries()) {
    const own = ofParticles[i] ?? 0
    ideal += jointShareAt(pair, Math.log(own * stepSeconds)) / curves.length
    if (Math.abs(own - best) <= 1) near++
  }
  return {
    best,
    bestExposure: exposureOfStep(best, stepSeconds),
    joint,
    expectedLoss: Math.max(0, ideal - joint),
    probabilityWithinOneStep: near / curves.length,
    ofParticles,
  }
}

/** Exposure of a number of printer steps, without the dust of binary fractions. */
export function exposureOfStep(step: number, stepSeconds: number): number {
  return Number((step * stepSeconds).toPrecision(12))
}
