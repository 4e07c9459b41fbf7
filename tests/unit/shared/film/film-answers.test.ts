import { describe, expect, it } from 'vitest'
import {
  answerFindings,
  compareLayerRules,
  depthAt,
  exposureForDepth,
  exposureForLayer,
  exposureFromProven,
  fitWorkingCurve,
  printThrough,
} from '#shared/film/index.ts'
import { fittedOnly, measured } from './readings.ts'

const readings = measured(
  [15, 20, 30, 40, 60, 80, 100, 120],
  [42.55, 66.31, 110.86, 142.63, 177.18, 206.94, 233.26, 244.49],
)
const fit = fittedOnly(fitWorkingCurve({ readings, exposureKind: 'seconds' }))

/** Films exactly on depth = 100 · ln(t / 1 s): every answer has a closed form. */
const exact = fittedOnly(
  fitWorkingCurve({
    readings: measured(
      [1.2, 2, 4, 8, 12],
      [1.2, 2, 4, 8, 12].map(t => 100 * Math.log(t)),
    ),
    exposureKind: 'seconds',
  }),
)

describe('exposureForDepth', () => {
  it('gives 21.03 for 75 µm with a standard error of ln exposure of 0.0164', () => {
    // Computed with NumPy from the same readings.
    const { value, meanInterval } = exposureForDepth(fit, 75)
    expect(value).toBeCloseTo(21.03, 2)
    expect(meanInterval.kind).toBe('finite')
    if (meanInterval.kind !== 'finite') return
    // t with 6 degrees of freedom at 0.975 is 2.4469.
    expect(Math.log(meanInterval.upper / meanInterval.lower) / 2 / 2.4469).toBeCloseTo(0.0164, 3)
  })

  it('is Ec for depth 0, interval included', () => {
    const { value, meanInterval } = exposureForDepth(fit, 0)
    expect(value).toBeCloseTo(fit.criticalExposure.value, 12)
    expect(meanInterval).toEqual(fit.criticalExposure.interval)
  })

  it('has a wider interval for one film than for the mean, and for an outside depth than for an inside one', () => {
    const width = (interval: { kind: string; lower?: number; upper?: number }) =>
      Math.log((interval.upper ?? 0) / (interval.lower ?? 0))
    const inside = exposureForDepth(fit, 150)
    expect(width(inside.singleInterval)).toBeGreaterThan(2 * width(inside.meanInterval))
    expect(width(exposureForDepth(fit, 400).meanInterval)).toBeGreaterThan(2 * width(inside.meanInterval))
  })

  it.each([
    [42.54, true],
    [42.55, false],
    [244.49, false],
    [244.5, true],
    [0, true],
    [-20, true],
  ])('says of %s µm whether it is extrapolated: %s', (depth, extrapolated) => {
    const answer = exposureForDepth(fit, depth)
    expect(answer.extrapolated).toBe(extrapolated)
    expect(answerFindings(fit, answer).some(finding => finding.code === 'outside-range')).toBe(extrapolated)
  })

  it.each([Number.NaN, Infinity])('throws on the depth %s', depth => {
    expect(() => exposureForDepth(fit, depth)).toThrow(
      expect.objectContaining({ code: 'depth-out-of-range' }),
    )
  })
})

describe('depthAt', () => {
  it('agrees with R on confidence and prediction at 50', () => {
    // R 4.2.2: predict(lm(C ~ log(E)), data.frame(E = 50), interval = ...)
    const { depthMicrometres, confidenceInterval, predictionInterval } = depthAt(fit, 50)
    expect(depthMicrometres).toBeCloseTo(160.87876905437037, 9)
    expect(confidenceInterval).toMatchObject({
      lower: expect.closeTo(158.18810310528247, 8),
      upper: expect.closeTo(163.56943500345827, 8),
    })
    expect(predictionInterval).toMatchObject({
      lower: expect.closeTo(152.85074759256042, 8),
      upper: expect.closeTo(168.90679051618031, 8),
    })
  })

  it('undoes exposureForDepth', () => {
    for (const depth of [-10, 0, 75, 300])
      expect(depthAt(fit, exposureForDepth(fit, depth).value).depthMicrometres).toBeCloseTo(depth, 9)
  })

  it.each([0, -1, Number.NaN])('throws on the exposure %s', exposure => {
    expect(() => depthAt(fit, exposure)).toThrow(expect.objectContaining({ code: 'exposure-out-of-range' }))
  })
})

describe('layer rules', () => {
  it.each([
    [{ kind: 'constant-overcure', overcureMicrometres: 30 }, 80],
    [{ kind: 'constant-overcure', overcureMicrometres: -10 }, 40],
    [{ kind: 'constant-ratio', ratio: 1.8 }, 90],
  ] as const)('%o at 50 µm is the exposure for a depth of %s µm', (rule, depth) => {
    const answer = exposureForLayer(fit, { layerHeightMicrometres: 50, rule })
    expect(answer).toMatchObject(exposureForDepth(fit, depth))
  })

  it('far-side dose: E = ratio · Ec · (e^q − 1), by hand for q = 0.5', () => {
    const answer = exposureForLayer(exact, {
      layerHeightMicrometres: 50,
      rule: { kind: 'far-side-dose', doseRatio: 3 },
    })
    expect(answer.value).toBeCloseTo(3 * (Math.exp(0.5) - 1), 10)
    expect(answer.depthMicrometres).toBeCloseTo(100 * Math.log(3 * (Math.exp(0.5) - 1)), 8)
  })

  it('far-side dose has no interval where the slope has none, and one that holds its value otherwise', () => {
    const rule = { kind: 'far-side-dose', doseRatio: 3 } as const
    const { value, meanInterval, singleInterval } = exposureForLayer(fit, {
      layerHeightMicrometres: 50,
      rule,
    })
    expect(meanInterval.kind === 'finite' && singleInterval.kind === 'finite').toBe(true)
    if (meanInterval.kind !== 'finite' || singleInterval.kind !== 'finite') return
    expect(meanInterval.lower).toBeLessThan(value)
    expect(meanInterval.upper).toBeGreaterThan(value)
    expect(singleInterval.lower).toBeLessThan(meanInterval.lower)
    expect(singleInterval.upper).toBeGreaterThan(meanInterval.upper)
    const noisy = fittedOnly(
      fitWorkingCurve({ readings: measured([10, 11, 12], [90, 60, 110]), exposureKind: 'seconds' }),
    )
    expect(exposureForLayer(noisy, { layerHeightMicrometres: 50, rule }).meanInterval).toEqual({
      kind: 'unbounded',
    })
  })

  it('stands side by side with a spread that is largest over smallest', () => {
    const comparison = compareLayerRules(exact, { layerHeightMicrometres: 100 })
    const values = comparison.byRule.map(({ value }) => value)
    expect(comparison.byRule.map(({ rule }) => rule.kind)).toEqual([
      'constant-overcure',
      'constant-ratio',
      'far-side-dose',
    ])
    expect(comparison.spreadRatio).toBeCloseTo(Math.max(...values) / Math.min(...values), 12)
    expect(comparison.sentence).toContain('The choice of the rule moves the exposure')
  })

  it('throws on heights and rule values that cannot be meant', () => {
    const ask =
      (layerHeightMicrometres: number, rule: Parameters<typeof exposureForLayer>[1]['rule']) => () =>
        exposureForLayer(fit, { layerHeightMicrometres, rule })
    for (const height of [0, -50, Number.NaN])
      expect(ask(height, 'constant-ratio')).toThrow(
        expect.objectContaining({ code: 'layer-height-out-of-range' }),
      )
    expect(ask(50, { kind: 'constant-ratio', ratio: 0 })).toThrow(
      expect.objectContaining({ code: 'rule-out-of-range' }),
    )
    expect(ask(50, { kind: 'far-side-dose', doseRatio: -1 })).toThrow(
      expect.objectContaining({ code: 'rule-out-of-range' }),
    )
    expect(ask(50, { kind: 'constant-overcure', overcureMicrometres: Number.NaN })).toThrow(
      expect.objectContaining({ code: 'rule-out-of-range' }),
    )
  })
})

describe('exposureFromProven', () => {
  const scale = (to: number, rule: Parameters<typeof exposureFromProven>[0]['rule'], provenSeconds = 3) =>
    exposureFromProven({
      provenSeconds,
      provenLayerHeightMicrometres: 50,
      layerHeightMicrometres: to,
      fit: exact,
      rule,
    })

  it.each([
    // Factors by formula at Dp 100 µm, computed with NumPy; the ratio of the proven exposure is ln(t1)·100/50.
    ['constant-overcure', 25, 0.779],
    ['constant-overcure', 100, 1.649],
    [{ kind: 'constant-ratio', ratio: 1.5 }, 25, 0.687],
    [{ kind: 'constant-ratio', ratio: 1.5 }, 100, 2.117],
    [{ kind: 'constant-ratio', ratio: 3 }, 25, 0.472],
    [{ kind: 'constant-ratio', ratio: 3 }, 100, 4.482],
    ['far-side-dose', 25, 0.438],
    ['far-side-dose', 100, 2.649],
  ] as const)('%o from 50 to %s µm multiplies by %s', (rule, to, factor) => {
    expect(scale(to, rule).factor).toBeCloseTo(factor, 3)
  })

  it('takes the cure ratio of the proven exposure from the films: t1 · (t1/tc)^(Δh/h1)', () => {
    const answer = scale(75, 'constant-ratio')
    expect(answer.value).toBeCloseTo(3 * Math.sqrt(3), 10)
    expect(answer.rule).toMatchObject({ kind: 'constant-ratio', ratio: expect.closeTo(2 * Math.log(3), 10) })
  })

  it('takes the critical time from the films too: at tc = 0.5 s the same exposure cures deeper', () => {
    const exposures = [1.2, 2, 4, 8, 12]
    const readings = measured(
      exposures,
      exposures.map(t => 100 * Math.log(t / 0.5)),
    )
    const half = fittedOnly(fitWorkingCurve({ readings, exposureKind: 'seconds' }))
    const answer = exposureFromProven({
      provenSeconds: 3,
      provenLayerHeightMicrometres: 50,
      layerHeightMicrometres: 75,
      fit: half,
      rule: 'constant-ratio',
    })
    expect(answer.value).toBeCloseTo(3 * Math.sqrt(6), 10)
    // Half a step of 0.05 s counts 1.5 times on ln t1; the films are exact.
    expect(answer.interval).toMatchObject({
      kind: 'finite',
      lower: expect.closeTo(2.95 ** 1.5 / Math.sqrt(0.5), 9),
      upper: expect.closeTo(3.05 ** 1.5 / Math.sqrt(0.5), 9),
    })
  })

  it('gives the proven exposure back for the same height, within half a step', () => {
    for (const rule of ['constant-overcure', 'constant-ratio', 'far-side-dose'] as const) {
      const answer = scale(50, rule)
      expect(answer.value).toBeCloseTo(3, 12)
      expect(answer.interval).toMatchObject({
        kind: 'finite',
        lower: expect.closeTo(2.95, 10),
        upper: expect.closeTo(3.05, 10),
      })
    }
  })

  it('joins the step and the interval of Dp by their squares', () => {
    const options = {
      provenSeconds: 25,
      provenLayerHeightMicrometres: 50,
      layerHeightMicrometres: 100,
      fit,
      rule: 'constant-overcure',
    } as const
    const { value, interval } = exposureFromProven({ ...options, provenStepSeconds: 2 })
    const dp = fit.penetrationDepthMicrometres
    if (interval.kind !== 'finite' || dp.interval.kind !== 'finite')
      throw new Error('expected finite intervals')
    const above = Math.hypot(Math.log(26 / 25), 50 / dp.interval.lower - 50 / dp.value)
    expect(Math.log(interval.upper / value)).toBeCloseTo(above, 12)
  })

  it('says that a print must decide where Dp is small against the change, or the exposure cures less than its layer', () => {
    expect(scale(100, 'constant-overcure').printMustDecide).toBe(false)
    expect(scale(115, 'constant-overcure')).toMatchObject({
      printMustDecide: true,
      sentence: expect.stringContaining('let a print decide'),
    })
    expect(scale(60, 'constant-ratio', 1.4)).toMatchObject({
      printMustDecide: true,
      sentence: expect.stringContaining('does not even cure through'),
    })
    expect(scale(60, 'constant-ratio', 0.9).interval).toEqual({ kind: 'unbounded' })
  })

  it('takes short exposures without a stated step, and refuses a step that swallows the exposure', () => {
    expect(scale(60, 'constant-overcure', 0.03).value).toBeGreaterThan(0)
    const options = {
      provenSeconds: 1,
      provenLayerHeightMicrometres: 50,
      layerHeightMicrometres: 60,
      fit,
      rule: 'constant-overcure',
    } as const
    expect(() => exposureFromProven({ ...options, provenStepSeconds: 2 })).toThrow(
      expect.objectContaining({ code: 'exposure-out-of-range' }),
    )
    expect(() => exposureFromProven({ ...options, provenSeconds: 0 })).toThrow(
      expect.objectContaining({ code: 'exposure-out-of-range' }),
    )
  })
})

describe('printThrough', () => {
  const through = (options: { layers?: number; recovery?: number; exposure?: number }) =>
    printThrough({ fit: exact, exposure: 3, layerHeightMicrometres: 50, ...options })

  it('is 59.9 µm for one layer and 153.1 µm for all of them at Dp 100, L 50, E/Ec 3', () => {
    // By formula, computed with NumPy.
    const all = through({})
    expect(all.singleLayerMicrometres).toBeCloseTo(59.86, 2)
    expect(all.limitMicrometres).toBeCloseTo(153.1, 1)
    expect(all.accumulatedMicrometres).toBeCloseTo(all.limitMicrometres, 6)
  })

  it('adds layer by layer: one is the single layer, six reach 95 % of the dose at q = 0.5', () => {
    expect(through({ layers: 1 }).accumulatedMicrometres).toBeCloseTo(through({}).singleLayerMicrometres, 12)
    const { accumulatedMicrometres, limitMicrometres } = through({ layers: 6 })
    expect(Math.exp((accumulatedMicrometres - limitMicrometres) / 100)).toBeCloseTo(0.95, 2)
  })

  it('forgets all earlier light at recovery 1, half of it at 0.5', () => {
    expect(through({ recovery: 1 }).accumulatedMicrometres).toBeCloseTo(
      through({}).singleLayerMicrometres,
      12,
    )
    // Two layers: dose 1 + 0.5 · e^-0.5.
    expect(through({ layers: 2, recovery: 0.5 }).accumulatedMicrometres).toBeCloseTo(
      through({}).singleLayerMicrometres + 100 * Math.log(1 + 0.5 * Math.exp(-0.5)),
      9,
    )
  })

  it('is zero where the light does not reach through, never less', () => {
    expect(through({ exposure: 1.01, layers: 1 })).toMatchObject({
      singleLayerMicrometres: 0,
      accumulatedMicrometres: 0,
    })
  })

  it.each([
    ['layers-out-of-range', { layers: 0 }],
    ['layers-out-of-range', { layers: 1.5 }],
    ['recovery-out-of-range', { recovery: -0.1 }],
    ['recovery-out-of-range', { recovery: 1.1 }],
    ['exposure-out-of-range', { exposure: 0 }],
  ])('throws %s', (code, options) => {
    expect(() => through(options)).toThrow(expect.objectContaining({ code }))
  })
})
