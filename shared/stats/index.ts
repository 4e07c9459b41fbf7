/** Statistics that the models stand on. */

// Shapes
export { StatsError, type Estimate, type Interval, type Refused } from './types.ts'

// Distributions
export { chiSquareQuantile, chiSquareUpperTail, fQuantile, fUpperTail, normalQuantile, normalUpperTail, tQuantile, tTwoSidedTail } from './quantiles.ts'
export { randomNormal, seededRandom, type RandomSource } from './random.ts'

// Lines
export { fitStraightLine, type StraightLine } from './straight-line.ts'
export { leastSquares, type LeastSquares, type LeastSquaresOutcome } from './least-squares.ts'
export { lackOfFit, type LackOfFit } from './lack-of-fit.ts'

// Intervals
export { fieller } from './fieller.ts'
export { circleExtremes } from './circle-extremes.ts'
export { moverSum, negate, type Ranged } from './mover.ts'

// Nonlinear curves
export { fitNonlinear, type NonlinearOptions } from './fit-nonlinear.ts'
export type { NonlinearFit, NonlinearJacobian, NonlinearModel, NonlinearOutcome, NonlinearRefusal } from './nonlinear-types.ts'

// Other lines
export { fitRobustLine, type RobustLine, type RobustOutcome } from './fit-robust-line.ts'
export { fitYork, type YorkLine, type YorkOutcome } from './fit-york.ts'
export { fitTobit, type TobitFit, type TobitOutcome } from './fit-tobit.ts'
