import { describe, expect, it } from 'vitest'
import { fitNonlinear, fitStraightLine, type NonlinearModel, type NonlinearOptions } from '#shared/stats/index.ts'

const x = [0.5, 1, 2, 3, 5, 8, 13]
const noise = [0.02, -0.03, 0.01, 0.03, -0.02, -0.01, 0.02]
const decay: NonlinearModel = ([height = 0, rate = 0, floor = 0]) => at => height * Math.exp(-rate * at) + floor
const truth = [4, 0.4, 1]
const y = x.map((at, i) => decay(truth)(at) + (noise[i] ?? 0))

function fitted(options: NonlinearOptions) {
  const outcome = fitNonlinear(options)
  if (outcome.kind !== 'fitted') throw new Error(`${outcome.reason}: ${outcome.detail}`)
  return outcome
}

/** The gradient of the sum of squares, by differences, at what a fit returned: zero in each free direction. */
function slopeOfSquares(model: NonlinearModel, weights: readonly number[], parameters: readonly number[], index: number): number {
  const squares = (shift: number) => x.reduce((sum, at, i) => {
    const moved = parameters.map((value, k) => (k === index ? value + shift : value))
    return sum + (weights[i] ?? 1) * ((y[i] ?? 0) - model(moved)(at)) ** 2
  }, 0)
  return (squares(1e-5) - squares(-1e-5)) / 2e-5
}

describe('fitNonlinear', () => {
  it('gives the straight line and its standard errors when the curve is one', () => {
    const line = fitStraightLine({ x, y })
    const fit = fitted({ x, y, model: ([a = 0, b = 0]) => at => a + b * at, starts: [[0, 1]] })
    expect(fit.parameters[0]).toBeCloseTo(line.intercept, 9)
    expect(fit.parameters[1]).toBeCloseTo(line.slope, 9)
    const variance = line.residualSumOfSquares / line.degreesOfFreedom
    expect(fit.standardErrors[1]).toBeCloseTo(Math.sqrt(variance / line.sumSquaresX), 9)
  })

  it.each([0, 1, 2])('holds parameter %i where it is told and optimises the others', heldIndex => {
    const held = truth.map((_, index) => index === heldIndex)
    const start = [3, 0.3, 0.8]
    const fit = fitted({ x, y, model: decay, starts: [start], held })
    expect(fit.parameters[heldIndex]).toBe(start[heldIndex])
    expect(fit.standardErrors[heldIndex]).toBe(0)
    expect(fit.covariance[heldIndex]).toEqual([0, 0, 0])
    expect(fit.degreesOfFreedom).toBe(5)
    for (const index of [0, 1, 2].filter(k => k !== heldIndex)) {
      // Against a curvature of about 1 to 100: within 1e-7 of the optimum.
      expect(Math.abs(slopeOfSquares(decay, [], fit.parameters, index))).toBeLessThan(5e-6)
      expect(fit.standardErrors[index]).toBeGreaterThan(0)
    }
  })

  it.each([0, 1, 2])('holds parameter %i as well with derivatives by formula', heldIndex => {
    const jacobian = ([height = 0, rate = 0]: readonly number[]) => (at: number) =>
      [Math.exp(-rate * at), -height * at * Math.exp(-rate * at), 1]
    const common = { x, y, model: decay, starts: [[3, 0.3, 0.8]], held: truth.map((_, index) => index === heldIndex) }
    const [plain, exact] = [fitted(common), fitted({ ...common, jacobian })]
    for (const k of [0, 1, 2]) {
      expect(exact.parameters[k]).toBeCloseTo(plain.parameters[k] ?? Number.NaN, 7)
      expect(exact.standardErrors[k]).toBeCloseTo(plain.standardErrors[k] ?? Number.NaN, 7)
    }
  })

  it('holds two of three and agrees with the model written without them', () => {
    const fit = fitted({ x, y, model: decay, starts: [[4, 0.3, 1]], held: [true, false, true] })
    const alone = fitted({ x, y, model: ([rate = 0]) => decay([4, rate, 1]), starts: [[0.3]] })
    expect(fit.parameters[1]).toBeCloseTo(alone.parameters[0] ?? Number.NaN, 10)
    expect(fit.standardErrors[1]).toBeCloseTo(alone.standardErrors[0] ?? Number.NaN, 10)
  })

  it('weights points: a weight of three is the point given three times', () => {
    const weights = x.map((_, i) => (i === 2 ? 3 : 1))
    const weighted = fitted({ x, y, weights, model: decay, starts: [truth] })
    const repeated = fitted({ x: [...x, 2, 2], y: [...y, y[2] ?? 0, y[2] ?? 0], model: decay, starts: [truth] })
    for (const k of [0, 1, 2]) expect(weighted.parameters[k]).toBeCloseTo(repeated.parameters[k] ?? Number.NaN, 8)
    expect(weighted.residualSumOfSquares).toBeCloseTo(repeated.residualSumOfSquares, 10)
  })

  it('finds the same optimum with and without a formula for the derivatives, and in any order of rows', () => {
    const jacobian = ([height = 0, rate = 0]: readonly number[]) => (at: number) =>
      [Math.exp(-rate * at), -height * at * Math.exp(-rate * at), 1]
    const plain = fitted({ x, y, model: decay, starts: [[1, 1, 0]] })
    const exact = fitted({ x, y, model: decay, jacobian, starts: [[1, 1, 0]] })
    const turned = fitted({ x: [...x].reverse(), y: [...y].reverse(), model: decay, jacobian, starts: [[1, 1, 0]] })
    for (const k of [0, 1, 2]) {
      expect(plain.parameters[k]).toBeCloseTo(exact.parameters[k] ?? Number.NaN, 8)
      expect(turned.parameters[k]).toBeCloseTo(exact.parameters[k] ?? Number.NaN, 10)
    }
  })

  it('takes the lowest optimum of several starts, wherever the good start stands', () => {
    // A sine has an optimum near every multiple of its frequency.
    const at = Array.from({ length: 20 }, (_, i) => i / 3)
    const wave = at.map((value, i) => Math.sin(2 * value) + 0.01 * Math.cos(37 * i))
    const model: NonlinearModel = ([frequency = 0]) => value => Math.sin(frequency * value)
    const wrong = fitted({ x: at, y: wave, model, starts: [[3.2]] })
    for (const starts of [[[1.9], [3.2], [4.4]], [[3.2], [1.9], [4.4]], [[3.2], [4.4], [1.9]]]) {
      const fit = fitted({ x: at, y: wave, model, starts })
      expect(fit.parameters[0]).toBeCloseTo(2, 1)
      expect(fit.residualSumOfSquares).toBeLessThan(wrong.residualSumOfSquares)
    }
  })

  it('takes exact data without scatter', () => {
    const fit = fitted({ x, y: x.map(decay(truth)), model: decay, starts: [[1, 1, 0]] })
    for (const k of [0, 1, 2]) expect(fit.parameters[k]).toBeCloseTo(truth[k] ?? Number.NaN, 8)
  })

  it('refuses a curve whose parameters only count as a product', () => {
    const outcome = fitNonlinear({ x, y, model: ([a = 0, b = 0]) => at => a * b * at, starts: [[1, 2]] })
    expect(outcome).toMatchObject({ kind: 'refused', reason: 'not-identified' })
  })

  it('refuses a curve that wants its parameter at infinity', () => {
    const outcome = fitNonlinear({ x, y: x.map(at => -at), model: ([a = 0]) => at => Math.exp(a) * at, starts: [[0]] })
    expect(outcome.kind).toBe('refused')
  })

  it('refuses a rate that may be anything above a size, because every point has levelled off', () => {
    const outcome = fitNonlinear({
      x, y: [5, 5.1, 4.9, 5.05, 4.95, 5.02, 4.98],
      model: ([top = 0, rate = 0]) => at => top * (1 - Math.exp(-rate * at)), starts: [[5, 30], [5, 60]],
    })
    expect(outcome.kind).toBe('refused')
  })

  it('refuses fewer points than free parameters, and takes as many', () => {
    const few = { x: x.slice(0, 2), y: y.slice(0, 2), model: decay }
    expect(fitNonlinear({ ...few, starts: [truth] })).toMatchObject({ kind: 'refused', reason: 'too-few-points' })
    const outcome = fitNonlinear({ ...few, starts: [truth], held: [false, false, true] })
    expect(outcome).toMatchObject({ kind: 'fitted', degreesOfFreedom: 0, standardErrors: [Infinity, Infinity, 0] })
  })

  it.each([
    ['length-mismatch', { weights: [1, 2] }],
    ['weight-out-of-range', { weights: x.map((_, i) => (i === 6 ? 0 : 1)) }],
    ['no-start', { starts: [] }],
    ['no-start', { starts: [truth, [1, Number.NaN, 1]] }],
    ['length-mismatch', { starts: [truth, [1, 1]] }],
    ['length-mismatch', { held: [true] }],
    ['nothing-free', { held: [true, true, true] }],
  ])('throws %s for a call that cannot be meant', (code, part) => {
    expect(() => fitNonlinear({ x, y, model: decay, starts: [truth], ...part })).toThrow(expect.objectContaining({ code }))
  })
})
