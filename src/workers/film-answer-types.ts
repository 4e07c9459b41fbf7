import type { FilmSettings } from '#shared/contracts/studies.ts'
import type {
  ComparisonOutcome, CompleteRule, Estimate, ExposureFromProven, Finding, FilmModelName, FilmReadingState, Interval, PrinterLimits, PrintThrough,
} from '#shared/film/index.ts'

export type { PrinterLimits }

/** What of a study the answer rests on, beside the readings. */
export interface FilmQuestion {
  readonly exposureKind: 'seconds' | 'mJ/cm2'
  readonly film: FilmSettings
  readonly layerHeightMicrometres: number
  readonly printer: PrinterLimits
  /** Any other height that a person asks about. */
  readonly otherLayerHeightMicrometres: number | null
}

/** A reading as it now stands on the screen, stored or not. */
export interface CurrentReading {
  readonly id: string
  readonly exposure: number
  readonly replicate: number
  readonly depthMicrometres: number | null
  readonly standardUncertaintyMicrometres: number | null
  readonly state: FilmReadingState
}

/** The straight line, or what a person accepted instead of it. */
export type CurveName = FilmModelName | 'with-missing-films'

/** An exposure that answers something, with what a printer can do of it. */
export interface ShownExposure {
  readonly value: number
  readonly meanInterval: Interval
  /** Null where the curve has no interval for one film. */
  readonly singleInterval: Interval | null
  readonly depthMicrometres: number
  readonly extrapolated: boolean
  /** Nearest printer step inside the printer's range; null without a step. */
  readonly step: number | null
  readonly beyondPrinter: 'below' | 'above' | null
}

export interface LayerAnswers {
  readonly layerHeightMicrometres: number
  /** `refusal`: why the accepted curve has no answer; the numbers are then the straight line's. */
  readonly byRule: readonly (ShownExposure & { readonly rule: CompleteRule; readonly refusal: string | null })[]
  readonly sentence: string
}

export interface CurveSample {
  readonly exposure: number
  readonly depth: number
  readonly confidence: readonly [number, number] | null
  readonly prediction: readonly [number, number] | null
}

export interface ChartPoint {
  readonly id: string
  readonly exposure: number
  /** 0 for films that are missing. */
  readonly depth: number
  readonly state: FilmReadingState
  readonly marked: boolean
}

export interface CurveNumbers {
  readonly penetrationDepth: Estimate
  readonly criticalExposure: Estimate
  readonly residualStandardDeviation: number
  readonly degreesOfFreedom: number
  readonly rSquared: number
  readonly filmCount: number
  readonly levelCount: number
  readonly measuredRange: { readonly depthMicrometresMin: number; readonly depthMicrometresMax: number; readonly exposureMin: number; readonly exposureMax: number }
}

export interface ReadingCounts {
  readonly measured: number
  readonly missing: number
  readonly excluded: number
}

interface AnswerBase {
  readonly counts: ReadingCounts
  readonly points: readonly ChartPoint[]
  /** Points left off the chart because there are too many to draw. */
  readonly pointsLeftOff: number
  readonly implausible: readonly { readonly id: string; readonly sentence: string }[]
}

export type FilmAnswer =
  | (AnswerBase & { readonly kind: 'refused'; readonly reason: string; readonly detail: string })
  | (AnswerBase & {
      readonly kind: 'fitted'
      readonly numbers: CurveNumbers
      /** The curve that the headline rests on, and why it is not the one asked for. */
      readonly curve: CurveName
      readonly curveRemark: string | null
      /** The exposure for the study's layer by the study's rule; refused where the accepted curve does not reach the depth. */
      readonly headline: ShownExposure | { readonly kind: 'refused'; readonly detail: string }
      readonly layers: readonly LayerAnswers[]
      readonly line: readonly CurveSample[]
      /** The accepted curve where it is not the straight line. */
      readonly otherLine: readonly CurveSample[] | null
      readonly findings: readonly Finding[]
    })

/** The other curves and fits beside the straight line; slower, so asked for after the line. */
export interface FilmComparisons {
  readonly kind: 'compared'
  readonly depthMicrometres: number
  readonly models: readonly {
    readonly model: FilmModelName
    readonly refusal: string | null
    readonly residualStandardDeviation: number | null
    readonly aiccChange: number | null
    readonly pValue: number | null
    readonly value: number | null
    readonly interval: Interval | null
    readonly changePercent: number | null
  }[]
  readonly preferred: FilmModelName
  readonly sentence: string
  readonly robust: { readonly differs: boolean; readonly sentence: string; readonly penetrationDepth: Estimate; readonly criticalExposure: Estimate; readonly value: number } | null
  readonly withoutOutlier: { readonly penetrationDepth: Estimate; readonly criticalExposure: Estimate; readonly value: number; readonly interval: Interval; readonly readingIds: readonly string[] } | null
  readonly withMissing: { readonly penetrationDepth: Estimate; readonly criticalExposure: Estimate; readonly value: number; readonly interval: Interval; readonly limitMicrometres: number } | { readonly refusal: string } | null
}
export type ComparisonsAnswer = FilmComparisons | { readonly kind: 'refused'; readonly detail: string }

export type ProvenAnswer = { readonly kind: 'answered'; readonly byRule: readonly (ExposureFromProven & { readonly step: number | null })[] } | { readonly kind: 'refused'; readonly detail: string }
export type PrintThroughAnswer = ({ readonly kind: 'answered' } & PrintThrough) | { readonly kind: 'refused'; readonly detail: string }
export type StudyComparisonAnswer = ComparisonOutcome | { readonly kind: 'refused'; readonly reason: string; readonly detail: string }
