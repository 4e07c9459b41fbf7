import type { Interval } from '../stats/types.ts'

export interface RulerDot {
  readonly exposure: number
  /** `used`: it entered the answer. `excluded`: kept, but left out. `missing`: no film, or lost. `planned`: not made yet. */
  readonly state: 'used' | 'excluded' | 'missing' | 'planned'
}

/** A pane: from where must-form is safe to where must-stay-open still is; the assured part lies inside it. */
export interface RulerWindow {
  readonly lower: number
  readonly upper: number
  readonly assured?: { readonly lower: number; readonly upper: number }
}

/** What an exposure ruler shows; every exposure in one unit. */
export interface RulerContent {
  readonly exposureKind: 'seconds' | 'mJ/cm2'
  /** Printer step in the unit of the exposures; null where there is none (an irradiance nobody measured). */
  readonly step: number | null
  /** What the printer can expose, in the unit of the exposures. */
  readonly printerRange?: { readonly min: number; readonly max: number } | undefined
  readonly dots: readonly RulerDot[]
  /** The films' answer for the layer height. */
  readonly answer: { readonly value: number; readonly interval: Interval } | null
  /** The printer step that the shop uses or is advised to use. */
  readonly chosenStep: number | null
  readonly window?: RulerWindow | undefined
}

export interface RulerTick {
  readonly x: number
  readonly exposure: number
  readonly length: number
  /** Absent on the ticks between. */
  readonly label?: string
}

export interface RulerSpan {
  readonly x: number
  readonly width: number
  /** The span goes on beyond the end of the strip. */
  readonly openLeft: boolean
  readonly openRight: boolean
}

/** Everything a drawing needs, in pixels from the top left corner. */
export interface RulerGeometry {
  readonly width: number
  readonly height: number
  readonly strip: { readonly x: number; readonly y: number; readonly width: number; readonly height: number }
  readonly domain: { readonly min: number; readonly max: number }
  readonly ticks: readonly RulerTick[]
  readonly dots: readonly { readonly x: number; readonly y: number; readonly radius: number; readonly state: RulerDot['state'] }[]
  readonly band: RulerSpan | null
  readonly answerX: number | null
  readonly mullionX: number | null
  readonly shadeLeft: RulerSpan | null
  readonly shadeRight: RulerSpan | null
  readonly pane: RulerSpan | null
  readonly assuredPane: RulerSpan | null
  /** Where the printer cannot go. */
  readonly outOfReach: readonly RulerSpan[]
}

/** `list`: one line of a table. `study`: beside the chapter. `print`: on paper. */
export type RulerSize = 'list' | 'study' | 'print'
