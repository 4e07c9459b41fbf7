/** Statistics that the models stand on. */

// Shapes
export { StatsError, type Estimate, type Interval, type Refused } from './types.ts'

// Distributions
export { chiSquareQuantile, chiSquareUpperTail, fQuantile, fUpperTail, normalQuantile, normalUpperTail, tQuantile, tTwoSidedTail } from './quantiles.ts'
export { randomNormal, seededRandom, type RandomSource } from './random.ts'

// Lines
export { fitStraightLine, type StraightLine } from './straight-line.ts'
export { lackOfFit, type LackOfFit } from './lack-of-fit.ts'

// Intervals
export { fieller } from './fieller.ts'
export { moverSum, negate, type Ranged } from './mover.ts'
