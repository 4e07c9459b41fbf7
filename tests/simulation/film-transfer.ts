import {
  compareWorkingCurves,
  exposureFromProven,
  fitWorkingCurve,
  type LayerRuleName,
} from '#shared/film/index.ts'
import type { RandomSource } from '#shared/stats/index.ts'
import { films, geometric, trueExposure, type FilmTruth, type Scatter } from './film-truth.ts'
import { CoverageTally, type Coverage } from './tally.ts'

export interface TransferCase {
  readonly penetrationDepthMicrometres: number
  readonly provenLayerHeightMicrometres: number
  readonly layerHeightMicrometres: number
  readonly films: number
  readonly rule: LayerRuleName
}

/** Changes of layer height, from harmless to hopeless. */
export const transferCases: readonly TransferCase[] = [
  ...(
    [
      [150, 50, 25, 6],
      [150, 50, 100, 6],
      [80, 50, 100, 6],
      [80, 50, 25, 6],
      [150, 50, 100, 4],
      [50, 50, 100, 5],
    ] as const
  ).map(([depth, from, to, count]) => transferCase(depth, from, to, count, 'constant-overcure')),
  transferCase(150, 50, 25, 6, 'constant-ratio'),
  transferCase(150, 50, 100, 6, 'constant-ratio'),
  transferCase(150, 50, 25, 6, 'far-side-dose'),
  transferCase(150, 50, 100, 6, 'far-side-dose'),
]

function transferCase(
  depth: number,
  from: number,
  to: number,
  count: number,
  rule: LayerRuleName,
): TransferCase {
  return {
    penetrationDepthMicrometres: depth,
    provenLayerHeightMicrometres: from,
    layerHeightMicrometres: to,
    films: count,
    rule,
  }
}

/** A proven exposure on a 0.1 s step, its true value anywhere within half a step, carried to another layer height. */
export function transferCoverage(options: {
  readonly case: TransferCase
  readonly sets: number
  readonly random: RandomSource
}): Coverage & {
  /** Share of data sets on which the answer says that a print must decide. */
  readonly printMustDecide: number
} {
  const { case: which, sets, random } = options
  const {
    penetrationDepthMicrometres: depth,
    provenLayerHeightMicrometres: h1,
    layerHeightMicrometres: h2,
    rule,
  } = which
  const provenSeconds = 1.7
  // The proven exposure cures 1.8 times its layer.
  const criticalExposure = provenSeconds / Math.exp((1.8 * h1) / depth)
  const truth: FilmTruth = {
    penetrationDepthMicrometres: depth,
    criticalExposure,
    scatter: { kind: 'additive', micrometres: 20 },
  }
  const from = trueExposure(truth, (100 / 150) * depth)
  const exposures = geometric({ from, to: 8 * from, levels: which.films, replicates: 1 })
  const tally = new CoverageTally()
  let mustDecide = 0
  for (let set = 0; set < sets; set++) {
    const fit = fitWorkingCurve({ readings: films(truth, exposures, random), exposureKind: 'seconds' })
    if (fit.kind !== 'fitted') {
      tally.addRefusal()
      continue
    }
    const t1 = provenSeconds + 0.1 * (random() - 0.5)
    const t2 = {
      'constant-overcure': t1 * Math.exp((h2 - h1) / depth),
      'constant-ratio': t1 * (t1 / criticalExposure) ** ((h2 - h1) / h1),
      'far-side-dose': (t1 * Math.expm1(h2 / depth)) / Math.expm1(h1 / depth),
    }[rule]
    const answer = exposureFromProven({
      provenSeconds,
      provenLayerHeightMicrometres: h1,
      layerHeightMicrometres: h2,
      fit,
      rule,
      provenStepSeconds: 0.1,
    })
    tally.add(answer.interval, t2)
    if (answer.printMustDecide) mustDecide += 1
  }
  return { ...tally.result(), printMustDecide: mustDecide / sets }
}

/**
 * Two printers, five exposures twice each: the potency ratio at 200 µm from separate lines, and the pooled one where
 * it is offered.
 */
export function potencyCoverage(options: {
  readonly scatter: Scatter
  readonly slopeRatio: number
  readonly sets: number
  readonly random: RandomSource
}): { readonly separate: Coverage; readonly pooled: Coverage; readonly offered: number } {
  const { scatter, slopeRatio, sets, random } = options
  const first: FilmTruth = { penetrationDepthMicrometres: 150, criticalExposure: 5, scatter }
  const second: FilmTruth = { penetrationDepthMicrometres: 150 * slopeRatio, criticalExposure: 6.5, scatter }
  const depthMicrometres = 200
  const ratio = trueExposure(second, depthMicrometres) / trueExposure(first, depthMicrometres)
  const separate = new CoverageTally()
  const pooled = new CoverageTally()
  const designOf = (truth: FilmTruth) =>
    geometric({ from: trueExposure(truth, 100), to: 8 * trueExposure(truth, 100), levels: 5, replicates: 2 })
  const designs = [designOf(first), designOf(second)] as const
  for (let set = 0; set < sets; set++) {
    const a = fitWorkingCurve({ readings: films(first, designs[0], random), exposureKind: 'seconds' })
    const b = fitWorkingCurve({ readings: films(second, designs[1], random), exposureKind: 'seconds' })
    if (a.kind !== 'fitted' || b.kind !== 'fitted') continue
    const answer = compareWorkingCurves([a, b], { depthMicrometres, sameWavelength: true })
    if (answer.kind !== 'compared') continue
    separate.add(answer.potencyRatio.interval, ratio)
    if (answer.pooled.kind === 'offered') pooled.add(answer.pooled.interval, ratio)
  }
  const result = pooled.result()
  return { separate: separate.result(), pooled: result, offered: result.sets / sets }
}
