/** One measurement beside its yardstick, both taken in the same run on the same machine. */
export interface BenchResult {
  readonly name: string
  /** Our own cost or size, in `unit`. */
  readonly ours: number
  /** The same work by the yardstick, in `unit`. */
  readonly yardstick: number
  readonly unit: string
  /** What is compared with `aim`; how many times better than the yardstick, or worse, as the name says. */
  readonly ratio: number
  readonly aim: number
  readonly higherIsBetter: boolean
}
