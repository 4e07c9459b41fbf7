import type { SidedInterval } from './exposure-at.ts'
import type { EdgeBelief } from './edge-belief.ts'
import { jointAtSteps, type StepChance } from './joint-at-steps.ts'

/** Shares of features that must pass on each kind at the sizes needed. */
export interface WindowTarget {
  /** @default 0.95 */
  readonly shareMustForm: number
  /** 0.95, or 0.5 for a graded set that is read as a count. @default 0.95 */
  readonly shareMustStayOpen: number
}

export interface WindowEdge {
  /** Exposure at which the share passes, posterior median. */
  readonly value: number
  /** Two-sided only where prints lie on both sides of the edge. */
  readonly interval: SidedInterval
  readonly bracketed: boolean
  readonly direction: 'lower' | 'higher' | 'none'
}

interface WindowAnswer {
  /** From here up, must-form is met. */
  readonly formEdge: WindowEdge
  /** Up to here, must-stay-open is met. */
  readonly openEdge: WindowEdge
  /** Chance that no exposure meets both. */
  readonly probabilityNoWindow: number
  readonly steps: readonly StepChance[]
  readonly best: StepChance
  /** Chance that the truly best step is the chosen one or its neighbour. */
  readonly probabilityWithinOneStep: number
  /** Joint pass probability that the chosen step gives away against the truly best one, on average. */
  readonly expectedLoss: number
}

export type WindowOutcome =
  | (WindowAnswer & {
      readonly kind: 'window'
      readonly window: { readonly lower: number; readonly upper: number }
      /** What the confidence limits leave of the window; null where they leave nothing or an edge is not bracketed. */
      readonly assuredWindow: { readonly lower: number; readonly upper: number } | null
      /** Only where both edges are bracketed; otherwise the window is at least what was found, and no width is shown. */
      readonly latitude: {
        readonly percent: number
        readonly logRatio: number
        readonly logRatioInterval: { readonly lower: number; readonly upper: number }
      } | null
    })
  | (WindowAnswer & { readonly kind: 'no-window' })

export const defaultWindowTarget: WindowTarget = { shareMustForm: 0.95, shareMustStayOpen: 0.95 }

function edgeOf(posterior: EdgeBelief, share: number, tail: number): WindowEdge {
  const [lower = 0, value = 0, upper = 0] = posterior.quantiles(share, [tail, 0.5, 1 - tail])
  const { bracketed, direction } = posterior
  // The end on the untested side is the prior's word alone: it is not shown as a result.
  const interval: SidedInterval = bracketed
    ? { kind: 'finite', lower, upper }
    : direction === 'lower'
      ? { kind: 'one-sided', lower: null, upper }
      : direction === 'higher'
        ? { kind: 'one-sided', lower, upper: null }
        : { kind: 'unbounded' }
  return { value, interval, bracketed, direction }
}

/**
 * The window between the two edges, the printer step to use and how sure it is.
 *
 * The best step maximises the posterior mean of the joint pass probability: estimates plugged in go badly wrong where
 * one side is not bracketed, and the midpoint is right only for equal slopes. Ties go to the step nearer the geometric
 * middle of the window, then to the lower exposure.
 *
 * @param options.stepSeconds - the printer's step, in the unit of the exposures
 * @param options.exposureMin - shortest exposure the printer takes (@default stepSeconds)
 * @param options.exposureMax - longest
 * @example
 * findWindow({ mustForm, mustStayOpen, target: { shareMustForm: 0.95, shareMustStayOpen: 0.5 }, stepSeconds: 0.1 }).best.exposure
 */
export function findWindow(options: {
  readonly mustForm: EdgeBelief
  readonly mustStayOpen: EdgeBelief
  readonly target?: Partial<WindowTarget>
  readonly stepSeconds: number
  readonly exposureMin?: number
  readonly exposureMax?: number
  readonly confidenceLevel?: number
}): WindowOutcome {
  const { mustForm, mustStayOpen, confidenceLevel = 0.95 } = options
  const target = { ...defaultWindowTarget, ...options.target }
  const tail = (1 - confidenceLevel) / 2
  const formEdge = edgeOf(mustForm, target.shareMustForm, tail)
  const openEdge = edgeOf(mustStayOpen, target.shareMustStayOpen, tail)
  const joint = jointAtSteps({ ...options, target, middle: Math.sqrt(formEdge.value * openEdge.value), confidenceLevel })
  const answer: WindowAnswer = { formEdge, openEdge, ...joint.answer }

  if (answer.probabilityNoWindow > 0.5 || openEdge.value <= formEdge.value) return { kind: 'no-window', ...answer }
  const bothBracketed = formEdge.bracketed && openEdge.bracketed
  const assured = { lower: upperEnd(formEdge.interval), upper: lowerEnd(openEdge.interval) }
  return {
    kind: 'window',
    ...answer,
    window: { lower: formEdge.value, upper: openEdge.value },
    assuredWindow:
      assured.lower !== null && assured.upper !== null && assured.upper > assured.lower
        ? { lower: assured.lower, upper: assured.upper }
        : null,
    latitude: bothBracketed
      ? {
          percent: (100 * (openEdge.value - formEdge.value)) / answer.best.exposure,
          logRatio: Math.log(openEdge.value / formEdge.value),
          logRatioInterval: joint.logRatioInterval,
        }
      : null,
  }
}

const upperEnd = (interval: SidedInterval): number | null => (interval.kind === 'finite' || interval.kind === 'one-sided' ? interval.upper : null)
const lowerEnd = (interval: SidedInterval): number | null => (interval.kind === 'finite' || interval.kind === 'one-sided' ? interval.lower : null)
