import { describe, expect, it } from 'vitest'
import { edgePosterior, findWindow, checkPrints, type Tally } from '#shared/window/index.ts'

const ladder = (...prints: readonly (readonly [number, number])[]): Tally[] => prints.map(([exposure, passed]) => ({ exposure, passed, total: 10 }))
const posterior = (tallies: readonly Tally[], kind: 'must-form' | 'must-stay-open' = 'must-form') => edgePosterior({ tallies, kind, prior: { guess: 1.7 } })
const answer = (tallies: readonly Tally[], share: number) => posterior(tallies).quantiles(share, [0.5, 0.025, 0.975])

/** Answers of an independent prototype in another language, three decimals; ours must come within 0.005 s. */
const vectors: readonly [string, Tally[], number, readonly [number, number, number]][] = [
  ['separated', ladder([1.5, 0], [1.6, 0], [1.7, 10], [1.8, 10]), 0.5, [1.649, 1.614, 1.686]],
  ['separated, 90 %', ladder([1.5, 0], [1.6, 0], [1.7, 10], [1.8, 10]), 0.9, [1.681, 1.637, 1.736]],
  ['2, 6, 10, 10', ladder([1.5, 2], [1.6, 6], [1.7, 10], [1.8, 10]), 0.5, [1.564, 1.495, 1.613]],
  ['2, 6, 10, 10, 90 %', ladder([1.5, 2], [1.6, 6], [1.7, 10], [1.8, 10]), 0.9, [1.66, 1.599, 1.772]],
  ['two prints at each exposure', ladder([1.6, 2], [1.6, 5], [1.8, 9], [1.8, 10]), 0.5, [1.625, 1.549, 1.687]],
  ['falling where it should rise once', ladder([1.5, 6], [1.6, 3], [1.7, 9], [1.8, 10]), 0.5, [1.535, 1.355, 1.627]],
  ['falling once, 90 %', ladder([1.5, 6], [1.6, 3], [1.7, 9], [1.8, 10]), 0.9, [1.733, 1.611, 2.03]],
  ['one gross anomaly', ladder([1.5, 0], [1.6, 9], [1.7, 1], [1.8, 9], [1.9, 10]), 0.5, [1.651, 1.511, 1.764]],
  ['one print', ladder([1.7, 5]), 0.5, [1.7, 1.49, 1.94]],
]

describe('the posterior of an edge', () => {
  it.each(vectors)('answers the prototype’s numbers to 0.005 s: %s', (_name, tallies, share, right) => {
    for (const [i, value] of answer(tallies, share).entries()) expect(Math.abs(value - (right[i] ?? 0))).toBeLessThan(0.005)
  })

  it('of must-stay-open is must-form in a mirror: exposures inverted, the same edge inverted', () => {
    const form = ladder([1.5, 1], [1.6, 4], [1.8, 9])
    const [edge = 0, lower = 0, upper = 0] = edgePosterior({ tallies: form, kind: 'must-form', prior: { guess: 1.7 } }).quantiles(0.5, [0.5, 0.025, 0.975])
    const open = form.map(tally => ({ ...tally, exposure: 1 / tally.exposure }))
    const [mirrored = 0, low = 0, high = 0] = edgePosterior({ tallies: open, kind: 'must-stay-open', prior: { guess: 1 / 1.7 } }).quantiles(0.5, [0.5, 0.025, 0.975])
    expect(mirrored).toBeCloseTo(1 / edge, 3)
    expect(low).toBeCloseTo(1 / upper, 3)
    expect(high).toBeCloseTo(1 / lower, 3)
  })

  it('scales with the unit of exposure', () => {
    const tallies = ladder([1.5, 1], [1.6, 4], [1.8, 9])
    const tenfold = edgePosterior({ tallies: tallies.map(t => ({ ...t, exposure: 10 * t.exposure })), kind: 'must-form', prior: { guess: 17 } })
    expect(tenfold.quantiles(0.9, [0.5])[0]).toBeCloseTo(10 * (answer(tallies, 0.9)[0] ?? 0), 2)
  })

  it('says where to print when all passed or all failed, and shows no interval of two ends', () => {
    const all = posterior(ladder([1.6, 10], [1.7, 10], [1.8, 10]))
    expect([all.bracketed, all.direction]).toEqual([false, 'lower'])
    const none = posterior(ladder([1.6, 0], [1.7, 0]))
    expect([none.bracketed, none.direction]).toEqual([false, 'higher'])
    const open = posterior(ladder([1.6, 10], [1.7, 10]), 'must-stay-open')
    expect([open.bracketed, open.direction]).toEqual([false, 'higher'])
  })

  it('without any print is the prior, and needs no data', () => {
    const [median = 0] = posterior([]).quantiles(0.5, [0.5])
    expect(median).toBeCloseTo(1.7, 2)
  })

  it('takes unequal counts, a tally of nothing judged, and a thousand prints', () => {
    const many: Tally[] = Array.from({ length: 1000 }, (_, i) => ({ exposure: 1.4 + (i % 7) * 0.1, passed: Math.min(8 + (i % 3), Math.round((8 + (i % 3)) / (1 + Math.exp(-34 * Math.log((1.4 + (i % 7) * 0.1) / 1.7))))), total: 8 + (i % 3) }))
    const edge = posterior([...many, { exposure: 1.7, passed: 0, total: 0 }])
    const [median = 0, lower = 0, upper = 0] = edge.quantiles(0.5, [0.5, 0.025, 0.975])
    expect(median).toBeGreaterThan(1.65)
    expect(median).toBeLessThan(1.75)
    expect(upper - lower).toBeLessThan(0.05)
  })

  it.each([[{ exposure: 0, passed: 1, total: 2 }], [{ exposure: 1, passed: 3, total: 2 }], [{ exposure: 1, passed: 1.5, total: 2 }], [{ exposure: Number.NaN, passed: 1, total: 2 }]])('refuses %o', tally => {
    expect(() => posterior([tally])).toThrow(expect.objectContaining({ code: 'bad-tally' }))
  })
})

describe('the window', () => {
  const form = posterior(ladder([1.5, 1], [1.6, 5], [1.7, 9], [1.8, 10], [1.9, 10]))
  const open = posterior(ladder([1.8, 10], [1.9, 10], [2.0, 9], [2.1, 5], [2.2, 1]), 'must-stay-open')

  it('lies between the edges, its assured part inside it, and the best step is one of the printer’s', () => {
    const outcome = findWindow({ mustForm: form, mustStayOpen: open, stepSeconds: 0.1, target: { shareMustForm: 0.9, shareMustStayOpen: 0.9 } })
    if (outcome.kind !== 'window') throw new Error('there is a window')
    expect(outcome.window.lower).toBeLessThan(outcome.window.upper)
    expect(outcome.best.exposure * 10).toBeCloseTo(Math.round(outcome.best.exposure * 10), 9)
    expect(outcome.best.exposure).toBeGreaterThan(outcome.window.lower)
    expect(outcome.best.exposure).toBeLessThan(outcome.window.upper)
    if (outcome.assuredWindow !== null) {
      expect(outcome.assuredWindow.lower).toBeGreaterThan(outcome.window.lower)
      expect(outcome.assuredWindow.upper).toBeLessThan(outcome.window.upper)
    }
    expect(outcome.steps.reduce((sum, step) => sum + step.probabilityBest, 0)).toBeCloseTo(1, 9)
  })

  it('is said not to exist where must-stay-open closes before must-form forms', () => {
    const early = posterior(ladder([1.2, 10], [1.3, 9], [1.4, 4], [1.5, 0]), 'must-stay-open')
    const outcome = findWindow({ mustForm: form, mustStayOpen: early, stepSeconds: 0.1 })
    expect(outcome.kind).toBe('no-window')
    expect(outcome.probabilityNoWindow).toBeGreaterThan(0.9)
  })

  it('shows a width only when both edges are bracketed', () => {
    const unknown = posterior(ladder([1.8, 10], [1.9, 10]), 'must-stay-open')
    const outcome = findWindow({ mustForm: form, mustStayOpen: unknown, stepSeconds: 0.1 })
    if (outcome.kind !== 'window') throw new Error('there is a window')
    expect(outcome.latitude).toBeNull()
    expect(outcome.openEdge.interval).toMatchObject({ kind: 'one-sided', upper: null })
  })

  it('never leaves what the printer can do', () => {
    const outcome = findWindow({ mustForm: form, mustStayOpen: open, stepSeconds: 0.1, exposureMin: 1.9, exposureMax: 2.4 })
    expect(Math.min(...outcome.steps.map(step => step.exposure))).toBeGreaterThanOrEqual(1.9)
    expect(Math.max(...outcome.steps.map(step => step.exposure))).toBeLessThanOrEqual(2.4)
  })
})

describe('the check of prints', () => {
  const check = (tallies: readonly Tally[]) => checkPrints({ tallies, kind: 'must-form', prior: { guess: 1.7 } }).verdict

  it('names the odd one of seven, not the clean ones', () => {
    const clean = ladder([1.4, 0], [1.5, 1], [1.6, 4], [1.7, 8], [1.8, 10], [1.9, 10], [2.0, 10])
    expect(check(clean).kind).toBe('none')
    const odd = clean.map((tally, i) => (i === 5 ? { ...tally, passed: 0 } : tally))
    expect(check(odd)).toMatchObject({ kind: 'named', index: 5 })
  })

  it('of four prints says that one disagrees, without naming it', () => {
    expect(check(ladder([1.5, 0], [1.6, 0], [1.7, 10], [1.9, 0])).kind).toBe('unnamed')
  })
})
