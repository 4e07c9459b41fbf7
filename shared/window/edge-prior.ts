/** What is believed of an edge before a print is read. */
export interface EdgePrior {
  /** Exposure at which about half of the features are expected to pass. */
  readonly guess: number
  /** Standard deviation of ln(guess): 0.35 for a number from elsewhere, about 0.1 from a film curve. */
  readonly guessLogSd: number
  /** Median of the relative transition width ln(E90 / E10). */
  readonly widthMedian: number
  readonly widthLogSd: number
  /** Scale of the half-normal prior of the print-to-print spread on the logit. */
  readonly printSpreadScale: number
  /** Share of features misread, split evenly to both sides. */
  readonly misreadShare: number
}

/** The prior of a guessed exposure, as the simulations of intervals used it. */
export const defaultEdgePrior: Omit<EdgePrior, 'guess'> = {
  guessLogSd: 0.35,
  widthMedian: 0.12,
  widthLogSd: 0.8,
  printSpreadScale: 0.6,
  misreadShare: 0.02,
}
