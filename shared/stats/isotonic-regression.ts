/**
 * Weighted isotonic regression by pooling adjacent violators.
 *
 * Makes no assumption about the shape of a response but its direction: the model-free companion of a fitted curve.
 *
 * Source: Ayer, Brunk, Ewing, Reid & Silverman, Ann. Math. Stat. 26 (1955) 641.
 *
 * @param values - in the order of the exposure
 * @param weights - above zero, one for each value
 * @param direction - `rising` (default) or `falling`
 * @returns the closest monotone values by weighted least squares
 * @throws {RangeError} when lengths differ or a weight is not above zero
 * @example
 * isotonicRegression([1, 3, 2, 4], [1, 1, 1, 1]) // => [1, 2.5, 2.5, 4]
 */
export function isotonicRegression(
  values: readonly number[],
  weights: readonly number[],
  direction: 'rising' | 'falling' = 'rising',
): number[] {
  if (values.length !== weights.length) throw new RangeError(`values has ${values.length} entries, weights ${weights.length}`)
  if (weights.some(weight => !(weight > 0))) throw new RangeError('every weight must be above zero')
  const sign = direction === 'rising' ? 1 : -1
  const blocks: { mean: number; weight: number; count: number }[] = []
  for (const [i, value] of values.entries()) {
    let block = { mean: sign * value, weight: weights[i] ?? 0, count: 1 }
    for (let last = blocks.at(-1); last !== undefined && last.mean >= block.mean; last = blocks.at(-1)) {
      const weight = last.weight + block.weight
      block = { mean: (last.mean * last.weight + block.mean * block.weight) / weight, weight, count: last.count + block.count }
      blocks.pop()
    }
    blocks.push(block)
  }
  return blocks.flatMap(block => new Array<number>(block.count).fill(sign * block.mean))
}
