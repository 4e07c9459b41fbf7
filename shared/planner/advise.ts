import { exposureOfStep, summariseSteps, type StepSummary } from './best-steps.ts'
import { informationGain } from './information-gain.ts'
import type { WindowBelief } from './particles.ts'
import type { PlannedCoupon } from './types.ts'

/** How much joint pass probability may be given away before printing on is worth it. */
export const lossLimits = { quick: 0.06, balanced: 0.04, careful: 0.02 } as const
export type Care = keyof typeof lossLimits

const withinOneStepMin = 0.9
const printsMax = 10
const candidatesMax = 27

/** One print that might be made. */
export interface PrintOption {
  readonly coupon: PlannedCoupon
  readonly exposure: number
  /** Minutes with handling. */
  readonly minutes: number
  /** Nats about the best step. */
  readonly gain: number
  readonly gainPerMinute: number
}

interface Standing {
  /** Step to use as things stand. */
  readonly bestExposure: number
  readonly joint: number
  readonly expectedLoss: number
  readonly probabilityWithinOneStep: number
  /** Whether a fine print lies within one step of the answer. */
  readonly confirmedByFinePrint: boolean
  /** The most telling prints that could follow, best first. */
  readonly options: readonly PrintOption[]
}

export type Advice =
  | (Standing & { readonly kind: 'print'; readonly next: PrintOption; readonly reason: 'tells-most-per-minute' | 'confirm-with-fine-print' | 'first-print'; readonly sentence: string })
  | (Standing & { readonly kind: 'stop'; readonly sentence: string })
  | (Standing & { readonly kind: 'not-resolvable'; readonly sentence: string })

export interface AdviceOptions {
  readonly belief: WindowBelief
  readonly coupons: readonly PlannedCoupon[]
  readonly stepSeconds: number
  /** Shortest and longest exposure of the printer. */
  readonly exposureMin?: number
  readonly exposureMax?: number
  /** Minutes of handling that each print adds. @default 0 */
  readonly handlingMinutes?: number
  /** @default balanced */
  readonly care?: Care
}

/**
 * The one print that would tell most per minute, or the advice to stop.
 *
 * Stops when the expected loss of joint pass probability is small, the chosen step is within one step of the best with
 * 90 %, and a fine print lies within one step of it: without the last clause a coarse coupon that stands off more than
 * assumed fools everyone.
 *
 * @returns exposures on whole printer steps only
 * @example
 * advise({ belief: beliefAfter({ prior, prints, random }), coupons: [coarse, fine], stepSeconds: 0.1 })
 */
export function advise(options: AdviceOptions): Advice {
  const { belief, stepSeconds, care = 'balanced' } = options
  const limits = stepLimits(options)
  const summary = summariseSteps(belief, stepSeconds, limits)
  const confirmed = belief.prints.some(
    print => !print.coupon.coarse && Math.abs(print.exposure / stepSeconds - summary.best) <= 1 + 1e-6,
  )
  const ranked = rankOptions(options, summary, limits)
  const standing: Standing = {
    bestExposure: summary.bestExposure,
    joint: summary.joint,
    expectedLoss: summary.expectedLoss,
    probabilityWithinOneStep: summary.probabilityWithinOneStep,
    confirmedByFinePrint: confirmed,
    options: ranked.slice(0, 5),
  }
  const sure = summary.probabilityWithinOneStep >= withinOneStepMin
  if (sure && confirmed && summary.expectedLoss <= lossLimits[care]) {
    return { ...standing, kind: 'stop', sentence: stopSentence(standing, options) }
  }
  if (belief.prints.length >= printsMax) {
    return {
      ...standing,
      kind: 'not-resolvable',
      sentence: `${belief.prints.length} prints have not settled it: the window is too narrow for this printer's steps, or the coupon too noisy. Another print would hardly change that.`,
    }
  }
  const fine = options.coupons.find(coupon => !coupon.coarse)
  if (sure && !confirmed && fine !== undefined) {
    const next = optionOf(options, fine, summary.bestExposure, summary)
    return {
      ...standing,
      kind: 'print',
      next,
      reason: 'confirm-with-fine-print',
      sentence: `Print the fine coupon at ${exposureText(next.exposure, stepSeconds)}: the step is nearly sure, and a fine print there must confirm it.`,
    }
  }
  const best = ranked[0]
  if (best === undefined) {
    return { ...standing, kind: 'not-resolvable', sentence: 'There is no coupon to print.' }
  }
  const first = belief.prints.length === 0
  return {
    ...standing,
    kind: 'print',
    next: best,
    reason: first ? 'first-print' : 'tells-most-per-minute',
    sentence: `Print the ${best.coupon.coarse ? 'coarse' : 'fine'} coupon at ${exposureText(best.exposure, stepSeconds)}, about ${Math.round(best.minutes)} minutes: of all prints it tells most per minute about the step to use.`,
  }
}

function stepLimits(options: AdviceOptions): { min: number; max: number } {
  const { stepSeconds, exposureMin = stepSeconds, exposureMax = Infinity } = options
  return {
    min: Math.max(1, Math.ceil(exposureMin / stepSeconds - 1e-9)),
    max: Number.isFinite(exposureMax) ? Math.floor(exposureMax / stepSeconds + 1e-9) : Number.MAX_SAFE_INTEGER,
  }
}

function optionOf(options: AdviceOptions, coupon: PlannedCoupon, exposure: number, summary: StepSummary): PrintOption {
  const minutes = coupon.minutes + (options.handlingMinutes ?? 0)
  const gain = informationGain(options.belief, { coupon, exposure, bestSteps: summary.ofParticles })
  return { coupon, exposure, minutes, gain, gainPerMinute: gain / minutes }
}

function rankOptions(options: AdviceOptions, summary: StepSummary, limits: { min: number; max: number }): PrintOption[] {
  const sorted = summary.ofParticles.slice().sort()
  const at = (share: number) => sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))] ?? 1
  const first = Math.max(limits.min, at(0.01) - 3)
  const last = Math.min(limits.max, at(0.99) + 3)
  const thin = Math.max(1, Math.ceil((last - first + 1) / candidatesMax))
  const ranked: PrintOption[] = []
  for (let step = first; step <= last; step += thin) {
    for (const coupon of options.coupons) ranked.push(optionOf(options, coupon, exposureOfStep(step, options.stepSeconds), summary))
  }
  return ranked.sort((a, b) => b.gainPerMinute - a.gainPerMinute)
}

function exposureText(exposure: number, stepSeconds: number): string {
  const digits = Math.max(0, Math.min(3, Math.ceil(-Math.log10(stepSeconds) - 1e-9)))
  return `${exposure.toFixed(digits)} s`
}

function stopSentence(standing: Standing, options: AdviceOptions): string {
  const next = standing.options[0]
  const chance = Math.round(100 * standing.probabilityWithinOneStep)
  const change = next === undefined ? '' : ` The most telling print left (${next.coupon.coarse ? 'coarse' : 'fine'}, ${exposureText(next.exposure, options.stepSeconds)}) could still move it by one step.`
  return `Stop: ${exposureText(standing.bestExposure, options.stepSeconds)} is within one printer step of the best with ${chance} %, and it gives away about ${standing.expectedLoss.toFixed(2)} of the joint pass probability on average.${change}`
}
