import { linkAt } from '../stats/binomial-link.ts'
import type { GradedEdge } from './graded-edge.ts'
import { defaultWindowTarget, type WindowTarget } from './find-window.ts'

export type DetailLimit =
  | {
      readonly kind: 'found'
      /** Size of features whose two edges meet: finer detail has no window. */
      readonly sizeMicrometres: number
      readonly interval: { readonly lower: number; readonly upper: number }
    }
  /** The edges hardly part with size: no size is told at which they meet. */
  | { readonly kind: 'refused'; readonly reason: 'edges-do-not-part'; readonly detail: string }

/**
 * The finest detail that has a window: the size at which the must-form edge and the must-stay-open edge meet.
 *
 * @example
 * detailLimit({ mustForm, mustStayOpen, target: { shareMustForm: 0.95, shareMustStayOpen: 0.95 } })
 */
export function detailLimit(options: {
  readonly mustForm: GradedEdge
  readonly mustStayOpen: GradedEdge
  readonly target?: Partial<WindowTarget>
  readonly confidenceLevel?: number
}): DetailLimit {
  const { mustForm, mustStayOpen, confidenceLevel = 0.95 } = options
  const target = { ...defaultWindowTarget, ...options.target }
  const [logitForm, logitOpen] = [linkAt('logit', target.shareMustForm), linkAt('logit', target.shareMustStayOpen)]
  const form = mustForm.draws
  const open = mustStayOpen.draws
  const count = Math.min(form.edges.length, open.edges.length)
  const sizes: number[] = []
  for (let i = 0; i < count; i++) {
    // Coprime stride: the two posteriors are independent, their draws come in order.
    const k = (i * 617) % count
    const gap = (open.edges[k] ?? 0) - logitOpen / (open.slopes[k] ?? 1) - (open.sizeSlopes[k] ?? 0) * Math.log(mustStayOpen.referenceSizeMicrometres)
      - ((form.edges[i] ?? 0) + logitForm / (form.slopes[i] ?? 1) - (form.sizeSlopes[i] ?? 0) * Math.log(mustForm.referenceSizeMicrometres))
    const parting = (open.sizeSlopes[k] ?? 0) - (form.sizeSlopes[i] ?? 0)
    if (parting > 1e-6) sizes.push(-gap / parting)
  }
  if (sizes.length < 0.9 * count) {
    return { kind: 'refused', reason: 'edges-do-not-part', detail: 'The prints do not say how the edges part with size. Print a coupon with more sizes.' }
  }
  sizes.sort((a, b) => a - b)
  const at = (probability: number) => Math.exp(sizes[Math.min(sizes.length - 1, Math.floor(probability * sizes.length))] ?? 0)
  const tail = (1 - confidenceLevel) / 2
  return { kind: 'found', sizeMicrometres: at(0.5), interval: { lower: at(tail), upper: at(1 - tail) } }
}
