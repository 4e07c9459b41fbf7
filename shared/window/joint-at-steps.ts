import { linkAt } from '../stats/binomial-link.ts'
import type { CurveDraws, EdgeBelief } from './edge-belief.ts'

/** The joint pass probability at one printer step. */
export interface StepChance {
  readonly exposure: number
  /** Chance that a must-form feature forms and a must-stay-open one stays open, with its band. */
  readonly joint: { readonly mean: number; readonly lower: number; readonly upper: number }
  /** Chance that this step is the best one. */
  readonly probabilityBest: number
}

const drawCount = 1000
/** Coprime to the number of draws and far from its simple fractions: pairs the two posteriors as if at random. */
const stride = 617
const stepsMax = 400

const logistic = (eta: number): number => 1 / (1 + Math.exp(-eta))

function quantileOf(sorted: Float64Array, probability: number): number {
  const position = probability * (sorted.length - 1)
  const below = Math.floor(position)
  const low = sorted[below] ?? 0
  return low + (position - below) * ((sorted[below + 1] ?? low) - low)
}

/** Whole numbers of printer steps between the outer limits of both edges, within what the printer takes. */
function stepNumbers(options: { form: CurveDraws; open: CurveDraws; stepSeconds: number; exposureMin: number; exposureMax: number }): number[] {
  const limits = [...quantilesOf(options.form.edges), ...quantilesOf(options.open.edges)].map(Math.exp)
  const first = Math.max(Math.ceil(options.exposureMin / options.stepSeconds - 1e-9), Math.floor(Math.min(...limits) / options.stepSeconds) - 2, 1)
  const last = Math.min(Math.floor(options.exposureMax / options.stepSeconds + 1e-9), Math.ceil(Math.max(...limits) / options.stepSeconds) + 2)
  const count = Math.max(1, last - first + 1)
  // An edge hardly known spans thousands of fine steps: every k-th is enough to say where the best lies.
  const thin = Math.ceil(count / stepsMax)
  return Array.from({ length: Math.ceil(count / thin) }, (_, i) => first + i * thin)
}

function quantilesOf(edges: Float64Array): number[] {
  const sorted = edges.slice().sort()
  return [quantileOf(sorted, 0.005), quantileOf(sorted, 0.995)]
}

/** Joint pass probability, best step and what it may give away, from paired draws of the two posteriors. */
export function jointAtSteps(options: {
  readonly mustForm: EdgeBelief
  readonly mustStayOpen: EdgeBelief
  readonly target: { readonly shareMustForm: number; readonly shareMustStayOpen: number }
  readonly stepSeconds: number
  readonly exposureMin?: number
  readonly exposureMax?: number
  readonly middle: number
  readonly confidenceLevel: number
}) {
  const { stepSeconds, exposureMin = stepSeconds, exposureMax = Infinity, confidenceLevel } = options
  const form = options.mustForm.draws(drawCount)
  const open = options.mustStayOpen.draws(drawCount)
  const numbers = stepNumbers({ form, open, stepSeconds, exposureMin, exposureMax })
  const exposures = numbers.map(number => Number((number * stepSeconds).toPrecision(12)))

  const joint = exposures.map(() => new Float64Array(drawCount))
  const bestOf = new Int32Array(drawCount)
  const best = new Float64Array(drawCount)
  const logRatios = new Float64Array(drawCount)
  const logitForm = linkAt('logit', options.target.shareMustForm)
  const logitOpen = linkAt('logit', options.target.shareMustStayOpen)
  let without = 0
  for (let i = 0; i < drawCount; i++) {
    const k = (i * stride) % drawCount
    const [formEdge, formSlope] = [form.edges[i] ?? 0, form.slopes[i] ?? 1]
    const [openEdge, openSlope] = [open.edges[k] ?? 0, open.slopes[k] ?? 1]
    for (const [s, exposure] of exposures.entries()) {
      const x = Math.log(exposure)
      const value = logistic(formSlope * (x - formEdge)) * logistic(openSlope * (openEdge - x))
      const row = joint[s]
      if (row !== undefined) row[i] = value
      if (value > (best[i] ?? 0)) {
        best[i] = value
        bestOf[i] = s
      }
    }
    const ratio = openEdge - logitOpen / openSlope - (formEdge + logitForm / formSlope)
    logRatios[i] = ratio
    if (ratio <= 0) without++
  }

  const means = joint.map(row => row.reduce((sum, value) => sum + value, 0) / drawCount)
  let chosen = 0
  for (const [s, mean] of means.entries()) {
    const lead = mean - (means[chosen] ?? 0)
    const distance = (index: number) => Math.abs(Math.log((exposures[index] ?? 1) / options.middle))
    if (lead > 1e-9 || (lead > -1e-9 && s !== chosen && distance(s) < distance(chosen) - 1e-12)) chosen = s
  }
  const counts = exposures.map(() => 0)
  let near = 0
  let loss = 0
  for (let i = 0; i < drawCount; i++) {
    const index = bestOf[i] ?? 0
    counts[index] = (counts[index] ?? 0) + 1
    if (Math.abs((numbers[index] ?? 0) - (numbers[chosen] ?? 0)) <= 1) near++
    loss += (best[i] ?? 0) - (joint[chosen]?.[i] ?? 0)
  }
  const tail = (1 - confidenceLevel) / 2
  const steps: StepChance[] = exposures.map((exposure, s) => {
    const sorted = (joint[s] ?? new Float64Array()).slice().sort()
    return {
      exposure,
      joint: { mean: means[s] ?? 0, lower: quantileOf(sorted, tail), upper: quantileOf(sorted, 1 - tail) },
      probabilityBest: (counts[s] ?? 0) / drawCount,
    }
  })
  const sortedRatios = logRatios.sort()
  const fallback: StepChance = { exposure: options.middle, joint: { mean: 0, lower: 0, upper: 0 }, probabilityBest: 0 }
  return {
    answer: {
      probabilityNoWindow: without / drawCount,
      steps,
      best: steps[chosen] ?? fallback,
      probabilityWithinOneStep: near / drawCount,
      expectedLoss: loss / drawCount,
    },
    logRatioInterval: { lower: quantileOf(sortedRatios, tail), upper: quantileOf(sortedRatios, 1 - tail) },
  }
}
