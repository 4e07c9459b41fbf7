import { describe, expect, it } from 'vitest'
import { fitBinomialGlm } from '#shared/stats/binomial-glm.ts'
import { isotonicRegression } from '#shared/stats/isotonic-regression.ts'
import { spearmanKarber } from '#shared/stats/spearman-karber.ts'
import { exposureAt, fitResponse, type ResponseFit, type SidedInterval, type Tally } from '#shared/window/index.ts'
import type { BinomialLink } from '#shared/window/index.ts'
import { digitsOfAgreement } from '#tests/helpers/digits.ts'
import { readReference } from '#tests/helpers/reference.ts'

interface Dose {
  readonly p: number
  readonly x: number
  readonly wald: readonly [number, number]
  readonly fieller: readonly [number, number] | null
  readonly fieller_type: string
  readonly profile: readonly [number | null, number | null]
  readonly profile_penalised?: readonly [number | null, number | null]
}
interface Glm {
  readonly coef: readonly number[]
  readonly cov: readonly (readonly number[])[]
  readonly deviance: number
  readonly pearson: number
  readonly ed: readonly Dose[]
}

const links: readonly BinomialLink[] = ['logit', 'probit', 'cloglog']

const tallies = (x: readonly number[], passed: readonly number[], total: readonly number[] | number): Tally[] =>
  x.map((value, i) => ({ exposure: Math.exp(value), passed: passed[i] ?? 0, total: typeof total === 'number' ? total : (total[i] ?? 0) }))

function fitted(data: readonly Tally[], link: BinomialLink, method: 'ml' | 'firth' = 'ml'): ResponseFit {
  const outcome = fitResponse({ tallies: data, kind: 'must-form', link, method })
  if (outcome.kind === 'refused') throw new Error(outcome.detail)
  return outcome
}

const fewest = (values: readonly (number | undefined)[], right: readonly number[]): number => Math.min(...right.map((value, i) => digitsOfAgreement(values[i], value)))

function ends(interval: SidedInterval): [number | null, number | null] {
  const log = (value: number | null) => (value === null ? null : Math.log(value))
  if (interval.kind === 'finite' || interval.kind === 'one-sided') return [log(interval.lower), log(interval.upper)]
  return [null, null]
}

function expectEnds(interval: SidedInterval, right: readonly (number | null)[], digits: number): void {
  // Ends that no double holds as an exposure are no ends.
  if (right.some(value => value !== null && Math.abs(value) > 700)) return void expect(interval.kind).toBe('unbounded')
  for (const [i, end] of ends(interval).entries()) {
    const wanted = right[i] ?? null
    if (wanted === null) expect(end).toBeNull()
    else expect(digitsOfAgreement(end ?? undefined, wanted), `${String(end)} against ${wanted}`).toBeGreaterThan(digits)
  }
}

function expectGlm(fit: ResponseFit, right: Glm): void {
  expect(fewest(fit.coefficients, right.coef)).toBeGreaterThan(9)
  expect(fewest(fit.covariance.flat(), right.cov.flat())).toBeGreaterThan(9)
  expect(digitsOfAgreement(fit.deviance, right.deviance)).toBeGreaterThan(9)
  expect(digitsOfAgreement(fit.pearson, right.pearson)).toBeGreaterThan(9)
  for (const dose of right.ed) {
    // A flat response puts its dose where no double reaches: exp(700) is the end.
    if (Math.abs(dose.x) > 700) continue
    const at = exposureAt(fit, dose.p)
    expect(digitsOfAgreement(Math.log(at.value), dose.x)).toBeGreaterThan(9)
    expectEnds(at.delta, dose.wald, 8)
    if (dose.fieller_type === 'finite' && dose.fieller !== null) expectEnds(at.fieller, dose.fieller, 8)
    else expect(at.fieller.kind).toBe(dose.fieller_type.startsWith('exclusive') ? 'exclusive' : 'unbounded')
  }
}

describe('maximum likelihood against R’s glm: coefficients, covariance, deviance and doses', () => {
  it.each(links)('beetles of Bliss, Ann. Appl. Biol. 22 (1935) 134, %s', link => {
    const { data, expected } = readReference<{ log10dose: number[]; n: number[]; killed: number[] }, { recomputed: Record<string, Glm>; published: Record<string, { coef: number[]; deviance: number }> }>('binomial_bliss_beetles')
    const right = expected.recomputed[link]
    if (right === undefined) throw new Error('the file lacks this link')
    const fit = fitted(tallies(data.log10dose, data.killed, data.n), link)
    expectGlm(fit, right)
    for (const dose of right.ed) expectEnds(exposureAt(fit, dose.p).profile, dose.profile, 7)
    // As printed: Dobson, An Introduction to Generalized Linear Models (2002), tables 7.2 to 7.4.
    for (const [i, value] of (expected.published[link]?.coef ?? []).entries()) expect(fit.coefficients[i]).toBeCloseTo(value, 1)
  })

  it.each(links)('age of menarche (Milicer & Szczotka 1966; R’s MASS), %s', link => {
    const { data, expected } = readReference<{ age: number[]; total: number[]; menarche: number[] }, Record<string, Glm>>('binomial_menarche')
    const right = expected[link]
    if (right === undefined) throw new Error('the file lacks this link')
    expectGlm(fitted(tallies(data.age, data.menarche, data.total), link), right)
  })

  it('O-rings (Dalal, Fowlkes & Hoadley, JASA 84 (1989) 945): falls instead of rising', () => {
    const { data, expected } = readReference<{ temperature_F: number[]; n_distressed_of_6: number[]; any: number[] }, { binomial_6: Glm; binary: Glm }>('binomial_orings')
    expectGlm(fitted(tallies(data.temperature_F, data.n_distressed_of_6, 6), 'logit'), expected.binomial_6)
    expectGlm(fitted(tallies(data.temperature_F, data.any, 1), 'logit'), expected.binary)
  })

  it.each(links)('rotenone (Finney, Probit Analysis), %s', link => {
    const { data, expected } = readReference<{ log10dose: number[]; n: number[]; killed: number[] }, Record<string, Glm>>('binomial_rotenone')
    const right = expected[link]
    if (right === undefined) throw new Error('the file lacks this link')
    expectGlm(fitted(tallies(data.log10dose, data.killed, data.n), link), right)
  })

  it('made-up ladders: three links, one separated, one flat with an exclusive Fieller set', () => {
    type Row = { id: string; E: number[]; k: number[]; n: number[] }
    const { data, expected } = readReference<Row[], { id: string; separation: string; fits: Record<string, Glm> | string }[]>('binomial_ladders_madeup')
    for (const [i, row] of data.entries()) {
      const right = expected[i]
      const ladder = tallies(row.E.map(Math.log), row.k, row.n)
      for (const link of links) {
        const outcome = fitResponse({ tallies: ladder, kind: 'must-form', link })
        if (typeof right?.fits === 'string' || right === undefined) {
          expect(outcome).toMatchObject({ kind: 'refused', reason: 'separated', separation: right?.separation })
        } else if (right.fits[link] !== undefined) {
          expect(outcome.separation).toBe(right.separation)
          expectGlm(fitted(ladder, link), right.fits[link])
        }
      }
    }
  })
})

describe('Firth’s penalised likelihood against R (Heinze & Schemper, Stat. Med. 21 (2002) 2409)', () => {
  type Row = { id: string; x: number[]; k: number[]; n: number[] }
  const { data, expected } = readReference<Row[], { id: string; separation: string; logit: Glm & { ed?: (Dose & { p?: number })[] } }[]>('firth_ladders')

  it.each(data.map((row, i) => [row.id, i] as const))('ladder %s: coefficients, covariance, and the profile of each dose', (_id, i) => {
    const row = data[i]
    const right = expected[i]
    if (row === undefined || right === undefined) throw new Error('the file lacks this ladder')
    const fit = fitted(tallies(row.x, row.k, row.n), 'logit', 'firth')
    expect(fewest(fit.coefficients, right.logit.coef)).toBeGreaterThan(7)
    expect(fewest(fit.covariance.flat(), right.logit.cov.flat())).toBeGreaterThan(7)
    // "all-one-outcome" is R's word for the separation that needs no threshold.
    expect(fit.separation).toBe(right.separation === 'all-one-outcome' ? 'complete' : right.separation)
    for (const dose of right.logit.ed ?? []) {
      if (dose.p === undefined) continue
      expectEnds(exposureAt(fit, dose.p).profile, dose.profile_penalised ?? dose.profile, 7)
    }
  })

  it('six predictors at once (urinary tract infections, Foxman 1997; R’s logistf data sex2)', () => {
    const names = ['age', 'oc', 'vic', 'vicl', 'vis', 'dia'] as const
    const { data: d, expected: right } = readReference<Record<(typeof names)[number] | 'k' | 'n', number[]>, { coef: number[]; se_inverse_fisher: number[] }>('firth_sex2')
    const outcome = fitBinomialGlm({ design: d.k.map((_, i) => [1, ...names.map(name => d[name][i] ?? 0)]), passed: d.k, total: d.n }, { link: 'logit', method: 'firth' })
    if (outcome.kind === 'refused') throw new Error(outcome.detail)
    expect(fewest(outcome.coefficients, right.coef)).toBeGreaterThan(7)
    expect(fewest(outcome.covariance.map((line, j) => Math.sqrt(line[j] ?? 0)), right.se_inverse_fisher)).toBeGreaterThan(7)
  })

  it('an infinite maximum-likelihood slope has a finite answer (endometrial cancer; R’s logistf)', () => {
    const { data: d, expected: right } = readReference<Record<'HG' | 'NV' | 'PI' | 'EH', number[]>, { coef: number[]; cov: number[][] }>('firth_endometrial')
    const design = d.HG.map((_, i) => [1, d.NV[i] ?? 0, d.PI[i] ?? 0, d.EH[i] ?? 0])
    const one = { design, passed: d.HG, total: d.HG.map(() => 1) }
    expect(fitBinomialGlm(one, { link: 'logit', method: 'ml' }).kind).toBe('refused')
    const outcome = fitBinomialGlm(one, { link: 'logit', method: 'firth' })
    if (outcome.kind === 'refused') throw new Error(outcome.detail)
    expect(fewest(outcome.coefficients, right.coef)).toBeGreaterThan(7)
    expect(fewest(outcome.covariance.flat(), right.cov.flat())).toBeGreaterThan(7)
  })

  it('nothing of ten passed: intercept ln(0.5/10.5), share 0.5/11 (Firth, Biometrika 80 (1993) 27)', () => {
    const outcome = fitBinomialGlm({ design: [[1]], passed: [0], total: [10] }, { link: 'logit', method: 'firth' })
    expect(outcome.kind === 'fitted' ? outcome.coefficients[0] : Number.NaN).toBeCloseTo(Math.log(0.5 / 10.5), 10)
    expect(outcome.kind === 'fitted' ? outcome.fitted[0] : Number.NaN).toBeCloseTo(0.5 / 11, 10)
  })
})

describe('without a model of the curve', () => {
  it('isotonic regression (Ayer et al., Ann. Math. Stat. 26 (1955) 641) gives R’s pava', () => {
    type Row = { y?: number[]; w?: number[]; k?: number[]; n?: number[]; dir?: string }
    const { data, expected } = readReference<Row[], { fit: number[] }[]>('isotonic_pava')
    for (const [i, row] of data.entries()) {
      const values = row.y ?? row.k?.map((count, j) => count / (row.n?.[j] ?? 1)) ?? []
      const result = isotonicRegression(values, row.w ?? row.n ?? [], row.dir === 'decreasing' ? 'falling' : 'rising')
      for (const [j, value] of (expected[i]?.fit ?? []).entries()) expect(result[j]).toBeCloseTo(value, 12)
    }
  })

  it('Spearman-Karber and its trimmed form (Finney 1978; Hamilton, Russo & Thurston 1977)', () => {
    type Row = { x: number[]; k: number[]; n: number[] }
    type Sk = { applicable?: boolean; mu: number; se?: number }
    const { data, expected } = readReference<Row[], Record<string, Sk>[]>('spearman_karber')
    for (const [i, row] of data.entries()) {
      const given = { x: row.x, passed: row.k, total: row.n }
      const plain = expected[i]?.sk
      const outcome = spearmanKarber(given)
      if (plain?.applicable === true) {
        expect(outcome.kind === 'fitted' ? outcome.mean : Number.NaN).toBeCloseTo(plain.mu, 10)
        expect(outcome.kind === 'fitted' ? outcome.standardError : Number.NaN).toBeCloseTo(plain.se ?? Number.NaN, 10)
      } else expect(outcome.kind).toBe('refused')
      for (const trim of [0.1, 0.2, 0.4]) {
        const right = expected[i]?.[`trim${trim}`]
        const trimmed = spearmanKarber({ ...given, trim })
        if (right === undefined) expect(trimmed.kind).toBe('refused')
        else expect(trimmed.kind === 'fitted' ? trimmed.mean : Number.NaN).toBeCloseTo(right.mu, 10)
      }
    }
  })
})
