import type { LackOfFit } from '../stats/lack-of-fit.ts'
import type { Estimate, Interval, Refused } from '../stats/types.ts'

/** `seconds` on one printer, or radiant exposure in mJ/cm² where the irradiance is known. */
export type ExposureKind = 'seconds' | 'mJ/cm2'

export type FilmReadingState = 'measured' | 'no-film' | 'lost-in-wash' | 'excluded'

/** One measured cure depth at one exposure. */
export interface FilmReading {
  readonly exposure: number
  /** Cured depth without substrate; ignored unless the state is measured or excluded. */
  readonly depthMicrometres: number
  readonly standardUncertaintyMicrometres?: number
  readonly state: FilmReadingState
  /** Carried through to points and findings. */
  readonly id?: string
  /** Readings that share it are repeated readings of one film and are averaged first: the film is the replicate. */
  readonly filmId?: string
}

/**
 * `equal`: unit weights, the safe default. `stated`: 1/u² from each reading's standard uncertainty. `proportional`:
 * 1/depth², only for a gauge that is declared as a percentage; wrongly chosen it is the worst choice.
 */
export type FilmWeighting = 'equal' | 'stated' | 'proportional'

/** One film as it entered the fit. */
export interface FilmPoint {
  readonly exposure: number
  readonly depthMicrometres: number
  /** Readings averaged into it. */
  readonly readingCount: number
  readonly readingIds: readonly string[]
  /** Positions of its readings in the input. */
  readonly readingIndexes: readonly number[]
  readonly weight: number
  readonly residualMicrometres: number
  readonly leverage: number
  readonly cooksDistance: number
  /** Residual over its standard deviation with the film left out; null where no degree of freedom is left. */
  readonly studentisedResidual: number | null
}

export type FindingSeverity = 'info' | 'caution' | 'serious'

/** Something that a person should know: a plain sentence first, its numbers, formula and source behind it. */
export interface Finding {
  readonly code:
    | 'lack-of-fit'
    | 'curvature'
    | 'influence'
    | 'outlier'
    | 'spread-grows'
    | 'few-levels'
    | 'few-films'
    | 'only-thick-films'
    | 'no-replicates'
    | 'slope-not-established'
    | 'critical-exposure-open'
    | 'weighting-proportional'
    | 'replicates-identical'
    | 'not-above-zero'
    | 'censored-left-out'
    | 'outside-range'
    | 'interval-open'
  readonly severity: FindingSeverity
  readonly sentence: string
  readonly numbers: Readonly<Record<string, number | string>>
  readonly formula?: string
  readonly source?: string
  /** Positions of the readings it speaks of. */
  readonly readingIndexes?: readonly number[]
}

/** What adding (ln E)² to the line would change; shown always, since few films cannot show a slight bend. */
export interface Curvature {
  /** Coefficient of (ln E)², in µm. */
  readonly coefficient: number
  readonly standardError: number
  readonly t: number
  readonly degreesOfFreedom: number
  readonly pValue: number
  /** ln exposure above which the bend shows: where the parabola crosses the line for the second time. */
  readonly turnLogExposure: number
  /** How far the bent curve lies above the straight one at the smallest exposure, in µm. */
  readonly thinEndMicrometres: number
  /** The same at the largest exposure. */
  readonly thickEndMicrometres: number
}

export interface WorkingCurveFit {
  readonly kind: 'fitted'
  readonly exposureKind: ExposureKind
  readonly weighting: FilmWeighting
  readonly confidenceLevel: number
  readonly interceptMicrometres: Estimate
  /** Dp: the slope on ln exposure. */
  readonly penetrationDepthMicrometres: Estimate
  /** Ec in mJ/cm², or the critical time in seconds; its interval is Fieller's, never symmetric. */
  readonly criticalExposure: Estimate
  /** Of (intercept, slope), in µm². */
  readonly covariance: readonly [readonly [number, number], readonly [number, number]]
  /** Zero degrees of freedom leave it at 0: with two films there is a point and no interval. */
  readonly residualStandardDeviation: number
  readonly degreesOfFreedom: number
  readonly rSquared: number
  readonly filmCount: number
  readonly levelCount: number
  readonly points: readonly FilmPoint[]
  readonly residuals: readonly number[]
  readonly leverages: readonly number[]
  readonly cooksDistances: readonly number[]
  readonly measuredRange: {
    readonly depthMicrometresMin: number
    readonly depthMicrometresMax: number
    readonly exposureMin: number
    readonly exposureMax: number
  }
  /** Positions of readings that did not enter: excluded ones, and films that did not form or were lost. */
  readonly excludedIndexes: readonly number[]
  readonly censoredIndexes: readonly number[]
  /** Positions of readings of films measured at or below zero: no film by the gauge, so they do not enter either. */
  readonly notAboveZeroIndexes: readonly number[]
  /** Tests of the straight line; null where the films leave nothing to test with. */
  readonly checks: { readonly curvature: Curvature | null; readonly lackOfFit: LackOfFit | null }
  readonly findings: readonly Finding[]
  /** The line around its weighted centre, from which every answer is made. */
  readonly centre: {
    readonly meanLogExposure: number
    readonly meanDepthMicrometres: number
    readonly sumSquaresLogExposure: number
    readonly sumWeights: number
  }
}

export type WorkingCurveRefusal = Refused<
  'no-films' | 'one-film' | 'one-exposure' | 'slope-not-positive' | 'uncertainty-missing'
>

export type WorkingCurveOutcome = WorkingCurveFit | WorkingCurveRefusal

/** The exposure for a cured depth. */
export interface ExposureForDepth {
  readonly depthMicrometres: number
  readonly value: number
  /** Exposures whose mean depth may be the target (Fieller). */
  readonly meanInterval: Interval
  /** Exposures at which one new film may have the target depth: adds one residual variance. */
  readonly singleInterval: Interval
  /** True where the depth lies outside the measured depths. */
  readonly extrapolated: boolean
}

export type LayerRuleName = 'constant-overcure' | 'constant-ratio' | 'far-side-dose'

/** How deep a layer must cure beyond its own height. No standard value exists: a shop's decision. */
export type LayerRule =
  | { readonly kind: 'constant-overcure'; readonly overcureMicrometres?: number }
  | { readonly kind: 'constant-ratio'; readonly ratio?: number }
  | { readonly kind: 'far-side-dose'; readonly doseRatio?: number }
