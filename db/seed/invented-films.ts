import { randomNormal, seededRandom } from '#shared/stats/index.ts'

/** A measured film of the demo shop: exposure as typed, thickness in micrometres rounded to what the caliper shows. */
export interface InventedFilm {
  readonly exposure: number
  readonly replicate: number
  readonly depthMicrometres: number
}

export interface FilmTruth {
  /** Cured depth in µm without measurement error. */
  readonly depthAt: (exposure: number) => number
  readonly exposures: readonly number[]
  readonly filmsPerExposure: number
  /** One standard deviation of caliper and film together. */
  readonly standardDeviationMicrometres: number
  readonly seed: number
}

/** Films as somebody would have measured them: the truth plus normal error, in steps of the caliper's 1 µm. */
export function inventFilms(truth: FilmTruth): readonly InventedFilm[] {
  const random = seededRandom(truth.seed)
  return truth.exposures.flatMap(exposure =>
    Array.from({ length: truth.filmsPerExposure }, (_, i) => ({
      exposure,
      replicate: i + 1,
      depthMicrometres: Math.round(truth.depthAt(exposure) + truth.standardDeviationMicrometres * randomNormal(random)),
    })),
  )
}

/** Straight working curve: depth = Dp ln(E / Ec). */
export const straightCurve = (penetrationDepthMicrometres: number, criticalExposure: number) => (exposure: number) =>
  penetrationDepthMicrometres * Math.log(exposure / criticalExposure)

/** Light of two lines in equal shares: the depth where their sum has fallen to Ec, found by halving. */
export const twoLineCurve = (penetrationDepthsMicrometres: readonly [number, number], criticalExposure: number) => (exposure: number) => {
  const [shallow, deep] = penetrationDepthsMicrometres
  let low = 0
  let high = 5000
  for (let i = 0; i < 60; i++) {
    const middle = (low + high) / 2
    const arriving = (exposure * (Math.exp(-middle / shallow) + Math.exp(-middle / deep))) / 2
    if (arriving > criticalExposure) low = middle
    else high = middle
  }
  return low
}

/** What the demo shop's films were made from. fixtures/data/README.md says the same; a test holds them together. */
export const demoTruths = {
  northGrey: { depthAt: straightCurve(160, 1.1), exposures: [1.6, 2.1, 2.9, 4, 5.7, 8.2], filmsPerExposure: 2, standardDeviationMicrometres: 4, seed: 20_261 },
  /** The same resin needs 1.35 times the seconds here: 1.485 / 1.1. */
  southGrey: { depthAt: straightCurve(160, 1.485), exposures: [2.2, 2.8, 3.9, 5.4, 7.7, 11], filmsPerExposure: 2, standardDeviationMicrometres: 4, seed: 20_262 },
  cornerClear: { depthAt: twoLineCurve([60, 260], 6), exposures: [8, 10, 13, 17, 23, 31, 42, 60], filmsPerExposure: 2, standardDeviationMicrometres: 3, seed: 20_263 },
  /** One film more than the truth: see `oddFilm`. */
  wideAmber: { depthAt: straightCurve(210, 2.4), exposures: [3.9, 4.9, 6.9, 9.8, 13.5, 19.6], filmsPerExposure: 2, standardDeviationMicrometres: 5, seed: 20_264 },
  southSand: { depthAt: straightCurve(120, 1.6), exposures: [2.4, 3, 4.2, 7.5], filmsPerExposure: 1, standardDeviationMicrometres: 4, seed: 20_265 },
} as const satisfies Record<string, FilmTruth>

/** The film of `wideAmber` that was measured 95 µm too thick. */
export const oddFilm = { exposure: 9.8, replicate: 2, addedMicrometres: 95 } as const
