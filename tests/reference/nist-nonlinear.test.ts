import { readFileSync } from 'node:fs'
import { afterAll, describe, expect, it } from 'vitest'
import { fitNonlinear } from '#shared/stats/index.ts'
import { digitsOfAgreement } from '#tests/helpers/digits.ts'
import { nonlinearJacobians, nonlinearModels } from './nist-nonlinear-models.ts'

// Source: NIST/ITL Statistical Reference Datasets, nonlinear regression; certified to 11 digits, recomputed to 20.
interface Set {
  readonly name: string
  readonly x: readonly number[]
  readonly y: readonly number[]
  readonly start1: readonly number[]
  readonly start2: readonly number[]
}
interface Certified {
  readonly recomputed: { readonly beta: readonly string[]; readonly se: readonly string[]; readonly rss: string; readonly resid_sd: string }
}
const reference: { readonly data: readonly Set[]; readonly expected: readonly Certified[] } = JSON.parse(
  readFileSync(new URL('../../fixtures/reference/nist_strd_nonlinear.json', import.meta.url), 'utf8'),
)

/** The published far starts from which a fit may end elsewhere; it must then be refused. */
const mayBeRefused = new Set(['BoxBOD start1', 'MGH17 start1', 'MGH10 start1', 'MGH09 start1', 'Eckerle4 start1'])

const cases = reference.data.flatMap((set, index) =>
  (['start1', 'start2'] as const).flatMap(start =>
    [false, true]
      .filter(byFormula => !byFormula || nonlinearJacobians[set.name] !== undefined)
      .map(byFormula => ({ set, index, start, byFormula, title: `${set.name} ${start}${byFormula ? ', derivatives by formula' : ''}` }))))

const table: string[] = []

describe('certified nonlinear sets (NIST StRD)', () => {
  // eslint-disable-next-line no-console -- the digits reached are the result of this file
  afterAll(() => console.log(`digits agreeing with the certified values\n${table.join('\n')}`))

  it('holds all 21 sets', () => {
    expect(reference.data).toHaveLength(21)
    expect(reference.data.map(set => set.name).filter(name => nonlinearModels[name] === undefined)).toEqual([])
  })

  it.each(cases)('$title: certified optimum or an honest refusal', ({ set, index, start, byFormula, title }) => {
    const model = nonlinearModels[set.name]
    const certified = reference.expected[index]?.recomputed
    if (model === undefined || certified === undefined) throw new Error(`no model or no certified values for ${set.name}`)
    const jacobian = byFormula ? nonlinearJacobians[set.name] : undefined
    const outcome = fitNonlinear({ x: set.x, y: set.y, model, starts: [set[start]], ...(jacobian === undefined ? {} : { jacobian }) })
    if (outcome.kind === 'refused') {
      table.push(`${title.padEnd(44)} refused: ${outcome.reason}`)
      expect(mayBeRefused).toContain(`${set.name} ${start}`)
      return
    }
    // b1 and b2 of Eckerle4 with both signs turned are the same curve to the last digit: its twin counts.
    const twin = set.name === 'Eckerle4' && (outcome.parameters[0] ?? 0) < 0 ? [-1, -1, 1] : []
    const beta = certified.beta.map((value, k) => digitsOfAgreement((outcome.parameters[k] ?? Number.NaN) * (twin[k] ?? 1), Number(value)))
    const errors = certified.se.map((value, k) => digitsOfAgreement(outcome.standardErrors[k], Number(value)))
    const squares = digitsOfAgreement(outcome.residualSumOfSquares, Number(certified.rss))
    table.push(
      `${title.padEnd(44)} parameters ${Math.min(...beta).toFixed(1)}, standard errors ${Math.min(...errors).toFixed(1)}, residual sum of squares ${squares.toFixed(1)}`,
    )
    expect(Math.min(...beta)).toBeGreaterThan(7)
    expect(Math.min(...errors)).toBeGreaterThan(byFormula ? 10 : 6)
    expect(squares).toBeGreaterThan(10)
    expect(digitsOfAgreement(outcome.residualStandardDeviation, Number(certified.resid_sd))).toBeGreaterThan(10)
  })
})
