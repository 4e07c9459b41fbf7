/** A coupon as the planner sees it: what a print of it costs and how sharply it is read. */
export interface PlannedCoupon {
  readonly id: string
  readonly minutes: number
  readonly millilitres: number
  readonly mustFormCount: number
  readonly mustStayOpenCount: number
  /** Coarse coupons stand off the fine ones by a shift of their own and read less sharply. */
  readonly coarse: boolean
  /** Slope of its curves as a share of the fine coupon's. @default 1 fine, 0.5 coarse */
  readonly slopeShare: number
  /** Share of its features misread. @default 0.01 fine, 0.06 coarse */
  readonly misreadShare: number
  /** Print-to-print standard deviation on the logit. @default 0.3 fine, 0.5 coarse */
  readonly printSpread: number
}

/** One print that was read: counts of both kinds. */
export interface ReadPrint {
  readonly coupon: PlannedCoupon
  readonly exposure: number
  readonly mustForm: { readonly passed: number; readonly total: number }
  readonly mustStayOpen: { readonly passed: number; readonly total: number }
}

/** What is believed of centre, width and slopes before a print; medians and standard deviations of logs. */
export interface PlannerPrior {
  readonly guess: number
  /** 0.35 from elsewhere, about 0.1 from a film curve. The tails are heavier than a normal's: a claim may be wrong. */
  readonly guessLogSd: number
  readonly windowLogRatioMedian: number
  readonly windowLogRatioLogSd: number
  readonly slopeMedian: number
  readonly slopeLogSd: number
  /** Standard deviation of the shift that all coarse prints share. */
  readonly coarseBiasSd: number
}

export const defaultPlannerPrior: Omit<PlannerPrior, 'guess'> = {
  guessLogSd: 0.35,
  windowLogRatioMedian: 0.17,
  windowLogRatioLogSd: 0.35,
  slopeMedian: 34,
  slopeLogSd: 0.5,
  coarseBiasSd: 0.05,
}
