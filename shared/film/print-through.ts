import { StatsError } from '../stats/types.ts'
import { checkLayerHeight } from './layer-rules.ts'
import type { WorkingCurveFit } from './types.ts'

export interface PrintThrough {
  /** How far one exposure cures beyond its layer, in µm; 0 where it does not reach through. */
  readonly singleLayerMicrometres: number
  /** With the light that all layers let through added up. */
  readonly accumulatedMicrometres: number
  /** The same for endlessly many layers. */
  readonly limitMicrometres: number
}

/**
 * How far light cures into a void behind a roof of layers.
 *
 * Each layer shines through those before it: y = Dp · [ln(E/Ec) − q + ln Σ uᵏ], q = L/Dp, u = (1 − recovery) · e^−q,
 * summed over the layers. Full accumulation (recovery 0) is an upper bound: fresh resin and oxygen between layers erase
 * part of it; one print of a channel tells the recovery. Derived from exponential attenuation; common practice, no
 * published source, for the recovery factor.
 *
 * @param options.exposure - of one layer, in the unit of the fit
 * @param options.layers - of the roof, a whole number from 1 (@default 1000)
 * @param options.recovery - from 0 (dose adds up fully) to 1 (each layer starts anew) (@default 0)
 * @throws {StatsError} `exposure-out-of-range`, `layer-height-out-of-range`, `layers-out-of-range`, `recovery-out-of-range`
 * @example
 * printThrough({ fit, exposure: 3 * fit.criticalExposure.value, layerHeightMicrometres: 50 }).accumulatedMicrometres
 */
export function printThrough(options: {
  readonly fit: WorkingCurveFit
  readonly exposure: number
  readonly layerHeightMicrometres: number
  readonly layers?: number
  readonly recovery?: number
}): PrintThrough {
  const { fit, exposure, layerHeightMicrometres, layers = 1000, recovery = 0 } = options
  checkLayerHeight(layerHeightMicrometres)
  if (!(exposure > 0 && Number.isFinite(exposure))) throw new StatsError('exposure-out-of-range', `exposure must be above zero, got ${exposure}`)
  if (!Number.isInteger(layers) || layers < 1) throw new StatsError('layers-out-of-range', `layers must be a whole number from 1, got ${layers}`)
  if (!(recovery >= 0 && recovery <= 1)) throw new StatsError('recovery-out-of-range', `recovery must be from 0 to 1, got ${recovery}`)
  const depth = fit.penetrationDepthMicrometres.value
  const q = layerHeightMicrometres / depth
  const single = depth * (Math.log(exposure / fit.criticalExposure.value) - q)
  // ln of the geometric series; expm1 keeps it exact where the layers are thin.
  const logKept = recovery === 1 ? -Infinity : Math.log1p(-recovery) - q
  const logSeries = (count: number) => (logKept === -Infinity ? 0 : Math.log(Math.expm1(count * logKept) / Math.expm1(logKept)))
  const limit = logKept === -Infinity ? 0 : -Math.log(-Math.expm1(logKept))
  return {
    singleLayerMicrometres: Math.max(0, single),
    accumulatedMicrometres: Math.max(0, single + depth * logSeries(layers)),
    limitMicrometres: Math.max(0, single + depth * limit),
  }
}
