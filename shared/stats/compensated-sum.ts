/**
 * Σ start − Σ aᵢ bᵢ, as if summed with twice the digits: exact products (Dekker) and exact sums (Knuth).
 *
 * Iterative refinement needs differences of near-equal numbers that are truly right.
 *
 * @example
 * compensatedSum([1e16, 1], [1], [1e16]) // => 1
 */
export function compensatedSum(start: readonly number[], a: readonly number[], b: readonly number[]): number {
  let sum = 0
  let lost = 0
  const add = (value: number): void => {
    const next = sum + value
    const back = next - sum
    lost += sum - (next - back) + (value - back)
    sum = next
  }
  for (const value of start) add(value)
  for (const [i, value] of a.entries()) {
    const [product, productLost] = exactProduct(value, -(b[i] ?? 0))
    add(product)
    lost += productLost
  }
  return sum + lost
}

function exactProduct(a: number, b: number): [number, number] {
  const split = (x: number): [number, number] => {
    const c = 134217729 * x
    const high = c - (c - x)
    return [high, x - high]
  }
  const product = a * b
  const [aHigh, aLow] = split(a)
  const [bHigh, bLow] = split(b)
  return [product, aLow * bLow - (product - aHigh * bHigh - aLow * bHigh - aHigh * bLow)]
}
