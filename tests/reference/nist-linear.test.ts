import { afterAll, describe, expect, it } from 'vitest'
import { fitStraightLine, leastSquares } from '#shared/stats/index.ts'
import { digitsOfAgreement } from '#tests/helpers/digits.ts'
import { readReference } from '#tests/helpers/reference.ts'

// Source: NIST/ITL Statistical Reference Datasets, linear regression; values recomputed in exact rational arithmetic.
interface Set {
  readonly name: string
  readonly model: string
  readonly y: readonly number[]
  readonly x: readonly number[] | readonly (readonly number[])[]
}
interface Expected {
  readonly certified: { readonly anova: { readonly df_res: number } }
  readonly exact_recomputed: { readonly beta: readonly string[]; readonly se: readonly string[]; readonly resid_sd: string }
}
const reference = readReference<readonly Set[], readonly Expected[]>('nist_strd_linear')
const cases = reference.data.flatMap((set, i) => {
  const expected = reference.expected[i]
  return expected === undefined ? [] : [{ name: set.name, set, expected }]
})

/** Digits that a set must reach in double precision with the powers of x as they stand: what its conditioning allows. */
const required: Readonly<Record<string, number>> = { Filip: 7, Longley: 12, Pontius: 12 }

function designOf({ model, x }: Set): number[][] {
  if (model.startsWith('y=B1*x')) return x.map(value => [Number(value)])
  const degree = /degree (\d+)/.exec(model)?.[1]
  if (degree === undefined) return x.map(row => [1, ...(typeof row === 'number' ? [row] : row)])
  return x.map(value => Array.from({ length: Number(degree) + 1 }, (_, power) => Number(value) ** power))
}

const table: string[] = []

describe('certified linear sets (NIST StRD)', () => {
  // eslint-disable-next-line no-console -- the digits reached are the result of this file
  afterAll(() => console.log(`digits agreeing with the certified values\n${table.join('\n')}`))

  it('holds all 11 sets', () => expect(cases).toHaveLength(11))

  it.each(cases)('$name by QR, powers as they stand', ({ name, set, expected }) => {
    const fit = leastSquares({ design: designOf(set), y: set.y })
    if (fit.kind === 'refused') throw new Error(`${name}: ${fit.reason}`)
    const exact = expected.exact_recomputed
    const beta = Math.min(...exact.beta.map((value, k) => digitsOfAgreement(fit.coefficients[k], Number(value))))
    const exactFit = Number(exact.resid_sd) === 0
    const errors = exactFit ? null : Math.min(...exact.se.map((value, k) => digitsOfAgreement(fit.standardErrors[k], Number(value))))
    const scatter = digitsOfAgreement(fit.residualStandardDeviation, Number(exact.resid_sd))
    table.push(`${name.padEnd(9)} coefficients ${beta.toFixed(1)}, standard errors ${errors?.toFixed(1) ?? 'all zero'}, residual standard deviation ${scatter.toFixed(1)}`)
    expect(beta).toBeGreaterThan(required[name] ?? 12)
    if (errors !== null) expect(errors).toBeGreaterThan(required[name] ?? 12)
    // Wampler1 and 2 fit exactly: their scatter is zero, judged absolutely against y up to 4e6.
    expect(scatter).toBeGreaterThan(exactFit ? 6 : (required[name] ?? 12))
    expect(fit.degreesOfFreedom).toBe(expected.certified.anova.df_res)
  })

  it('Norris by the centred straight line', () => {
    const found = cases.find(one => one.name === 'Norris')
    if (found === undefined) throw new Error('Norris is missing')
    const { set, expected } = found
    const line = fitStraightLine({ x: set.x.map(Number), y: set.y })
    expect(digitsOfAgreement(line.intercept, Number(expected.exact_recomputed.beta[0]))).toBeGreaterThan(11)
    expect(digitsOfAgreement(line.slope, Number(expected.exact_recomputed.beta[1]))).toBeGreaterThan(13)
    expect(digitsOfAgreement(Math.sqrt(line.residualSumOfSquares / line.degreesOfFreedom), Number(expected.exact_recomputed.resid_sd))).toBeGreaterThan(11)
  })
})
