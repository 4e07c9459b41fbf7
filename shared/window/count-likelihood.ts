/**
 * Likelihood of "r of n passed" on one print, with what a print adds of its own.
 *
 * A feature passes with the curve's chance at eta + σz, where z is the print's own normal deviate, and a share of the
 * features is misread, half to either side. The table holds ln ∫ C(n, r) p^r (1 - p)^(n - r) φ(z) dz over a grid of eta,
 * by nine-point Gauss-Hermite quadrature; the posterior interpolates in it.
 */

/** Grid of the linear predictor: beyond ±14 the curve is flat to six digits, and the misread share rules. */
export const etaLimit = 14
export const etaStep = 0.025
export const etaCount = Math.round((2 * etaLimit) / etaStep) + 1

/** Gauss-Hermite nodes and weights for a standard normal, nine points (Abramowitz & Stegun, table 25.10, rescaled). */
const nodes = [0, 1.0232556637891326, 2.0768479786778302, 3.205429002856470, 4.512745863399783]
const nodeWeights = [0.4063492063492064, 0.2440975028949394, 0.04991640676521787, 0.002789141321231769, 2.234584400774658e-5]

export const quadrature: readonly { readonly z: number; readonly weight: number }[] = nodes.flatMap((z, i) => {
  const weight = nodeWeights[i] ?? 0
  return z === 0 ? [{ z, weight }] : [{ z, weight }, { z: -z, weight }]
})

/** Print-to-print standard deviations on the logit that the posterior averages over. */
export const printSpreads: readonly number[] = [0, 0.3, 0.6, 0.9, 1.3]

interface ChanceGrid {
  readonly logPass: Float64Array
  readonly logFail: Float64Array
}

/** ln chance to pass and to fail for each quadrature node and eta; the same for every count, so made once. */
function makeChanceGrid(spread: number, misreadShare: number): ChanceGrid {
  const size = quadrature.length * etaCount
  const logPass = new Float64Array(size)
  const logFail = new Float64Array(size)
  for (const [k, { z }] of quadrature.entries()) {
    for (let j = 0; j < etaCount; j++) {
      const eta = -etaLimit + j * etaStep + spread * z
      const small = Math.exp(-Math.abs(eta))
      const far = small / (1 + small)
      const pass = eta >= 0 ? 1 - far : far
      const fail = eta >= 0 ? far : 1 - far
      logPass[k * etaCount + j] = Math.log(misreadShare / 2 + (1 - misreadShare) * pass)
      logFail[k * etaCount + j] = Math.log(misreadShare / 2 + (1 - misreadShare) * fail)
    }
  }
  return { logPass, logFail }
}

const chanceGrids = new Map<string, ChanceGrid>()
const columns = new Map<string, Float64Array>()
/** About 9 kB each: enough for every count of some dozens of totals. */
const columnsMax = 4000

function logChoose(n: number, r: number): number {
  let sum = 0
  for (let i = 1; i <= Math.min(r, n - r); i++) sum += Math.log((n - Math.min(r, n - r) + i) / i)
  return sum
}

/**
 * The table of one count: ln likelihood at each eta of the grid.
 *
 * Tables depend on nothing but their arguments and are kept for the next call.
 *
 * @param count.passed - r, from 0 to total
 * @param count.total - n, features judged
 * @param count.spread - print-to-print standard deviation on the logit
 * @param count.misreadShare - share of features misread, in (0, 1)
 * @example
 * countLogLikelihood({ passed: 5, total: 10, spread: 0, misreadShare: 0.02 })[560] // ln C(10,5)/2^10 at eta 0
 */
export function countLogLikelihood(count: {
  readonly passed: number
  readonly total: number
  readonly spread: number
  readonly misreadShare: number
}): Float64Array {
  const { passed, total, spread, misreadShare } = count
  const gridKey = `${spread}|${misreadShare}`
  const key = `${gridKey}|${total}|${passed}`
  const known = columns.get(key)
  if (known !== undefined) return known
  const grid = chanceGrids.get(gridKey) ?? makeChanceGrid(spread, misreadShare)
  chanceGrids.set(gridKey, grid)
  const constant = logChoose(total, passed)
  const table = new Float64Array(etaCount)
  for (let j = 0; j < etaCount; j++) {
    let sum = 0
    let largest = -Infinity
    const nodesUsed = spread === 0 ? 1 : quadrature.length
    // Sum of exponentials around the largest term: counts of a thousand features underflow otherwise.
    for (let pass = 0; pass < 2; pass++) {
      for (let k = 0; k < nodesUsed; k++) {
        const at = k * etaCount + j
        const term = passed * (grid.logPass[at] ?? 0) + (total - passed) * (grid.logFail[at] ?? 0)
        if (pass === 0) largest = Math.max(largest, term)
        else sum += (spread === 0 ? 1 : (quadrature[k]?.weight ?? 0)) * Math.exp(term - largest)
      }
    }
    table[j] = constant + largest + Math.log(sum)
  }
  if (columns.size >= columnsMax) columns.clear()
  columns.set(key, table)
  return table
}

/** Linear interpolation in a table; eta beyond the grid takes the end's value. */
export function interpolateEta(table: Float64Array, eta: number): number {
  const position = (eta + etaLimit) / etaStep
  if (position <= 0) return table[0] ?? 0
  if (position >= etaCount - 1) return table[etaCount - 1] ?? 0
  const below = Math.floor(position)
  const share = position - below
  return (table[below] ?? 0) * (1 - share) + (table[below + 1] ?? 0) * share
}
