import type { FilmReading } from '#shared/film/index.ts'
import { randomNormal, type RandomSource } from '#shared/stats/index.ts'

/** A working curve as nature holds it, and how films scatter around it. */
export interface FilmTruth {
  readonly penetrationDepthMicrometres: number
  readonly criticalExposure: number
  readonly scatter: Scatter
  /** Depth lost per ln unit beyond `bendFrom` ln units past Ec, as a share of Dp. */
  readonly bend?: { readonly fromLogUnits: number; readonly share: number }
}

export type Scatter =
  | { readonly kind: 'additive'; readonly micrometres: number }
  | { readonly kind: 'proportional'; readonly share: number }

export function trueDepth(truth: FilmTruth, exposure: number): number {
  const units = Math.log(exposure / truth.criticalExposure)
  const beyond =
    truth.bend === undefined ? 0 : truth.bend.share * Math.max(0, units - truth.bend.fromLogUnits)
  return truth.penetrationDepthMicrometres * (units - beyond)
}

/** Exposure that truly cures to a depth. */
export function trueExposure(truth: FilmTruth, depthMicrometres: number): number {
  const straight = depthMicrometres / truth.penetrationDepthMicrometres
  const { bend } = truth
  const units =
    bend === undefined || straight <= bend.fromLogUnits
      ? straight
      : (straight - bend.share * bend.fromLogUnits) / (1 - bend.share)
  return truth.criticalExposure * Math.exp(units)
}

export function scattered(truth: FilmTruth, depth: number, random: RandomSource): number {
  const { scatter } = truth
  return (
    depth + (scatter.kind === 'additive' ? scatter.micrometres : scatter.share * depth) * randomNormal(random)
  )
}

/** One film at each exposure, in µm to full digits. */
export const films = (truth: FilmTruth, exposures: readonly number[], random: RandomSource): FilmReading[] =>
  exposures.map(exposure => ({
    exposure,
    depthMicrometres: scattered(truth, trueDepth(truth, exposure), random),
    state: 'measured',
  }))

/** Geometric from `from` to `to`, each `replicates` times. */
export function geometric(options: {
  readonly from: number
  readonly to: number
  readonly levels: number
  readonly replicates: number
}): number[] {
  const { from, to, levels, replicates } = options
  return Array.from({ length: levels }, (_, i) => from * (to / from) ** (i / (levels - 1))).flatMap(
    exposure => new Array<number>(replicates).fill(exposure),
  )
}
