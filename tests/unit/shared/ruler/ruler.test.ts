import { describe, expect, it } from 'vitest'
import { rulerGeometry, rulerSentence, type RulerContent } from '#shared/ruler/index.ts'

const content: RulerContent = {
  exposureKind: 'seconds',
  step: 0.1,
  printerRange: { min: 0.5, max: 60 },
  dots: [{ exposure: 1.6, state: 'used' }, { exposure: 2.9, state: 'excluded' }, { exposure: 8.2, state: 'used' }, { exposure: 2.1, state: 'missing' }],
  answer: { value: 2.05, interval: { kind: 'finite', lower: 1.94, upper: 2.17 } },
  chosenStep: 2.1,
}
const study = { width: 640, size: 'study' } as const

describe('rulerGeometry', () => {
  it('keeps equal ratios equally far apart, since the scale is logarithmic', () => {
    const { dots } = rulerGeometry({ ...content, dots: [1, 2, 4].map(exposure => ({ exposure, state: 'used' as const })) }, study)
    const [a, b, c] = dots.map(dot => dot.x)
    expect((b ?? 0) - (a ?? 0)).toBeCloseTo((c ?? 0) - (b ?? 0), 9)
  })

  it('holds every dot, the answer and the chosen step inside the strip', () => {
    const { dots, strip, answerX, mullionX } = rulerGeometry(content, study)
    for (const x of [...dots.map(dot => dot.x), answerX ?? -1, mullionX ?? -1]) {
      expect(x).toBeGreaterThan(strip.x)
      expect(x).toBeLessThan(strip.x + strip.width)
    }
  })

  it('puts ticks on printer steps only, apart from each other, with the step’s decimals', () => {
    for (const step of [0.05, 0.1, 0.5]) {
      const { ticks } = rulerGeometry({ ...content, step }, study)
      expect(ticks.length).toBeGreaterThan(4)
      for (const tick of ticks) expect(Math.abs(tick.exposure / step - Math.round(tick.exposure / step))).toBeLessThan(1e-9)
      for (const [i, tick] of ticks.slice(1).entries()) expect(tick.x - (ticks[i]?.x ?? 0)).toBeGreaterThanOrEqual(7)
    }
    expect(rulerGeometry(content, study).ticks.some(tick => tick.label === '2.0')).toBe(true)
  })

  it('thins labels more in a list than in the study', () => {
    const labels = (size: 'list' | 'study', width: number) => rulerGeometry(content, { width, size }).ticks.filter(tick => tick.label !== undefined).length
    expect(labels('list', 220)).toBeLessThan(labels('study', 640))
    expect(labels('list', 220)).toBeGreaterThan(0)
  })

  it('draws the interval as a band around the answer, and no band where the interval is open', () => {
    const { band, answerX } = rulerGeometry(content, study)
    expect(band?.x).toBeLessThan(answerX ?? 0)
    expect((band?.x ?? 0) + (band?.width ?? 0)).toBeGreaterThan(answerX ?? 0)
    expect(rulerGeometry({ ...content, answer: { value: 2, interval: { kind: 'unbounded' } } }, study).band).toBeNull()
  })

  it('is not squeezed by an interval that reaches a thousand times the answer, and says that the band goes on', () => {
    const wide = rulerGeometry({ ...content, answer: { value: 2, interval: { kind: 'finite', lower: 0.001, upper: 2000 } } }, study)
    expect(wide.domain.max / wide.domain.min).toBeLessThan(30)
    expect(wide.band).toMatchObject({ openLeft: true, openRight: true })
  })

  it('shades what is not safe and leaves the window clear, its assured part inside', () => {
    const { shadeLeft, shadeRight, pane, assuredPane } = rulerGeometry({ ...content, window: { lower: 1.8, upper: 2.6, assured: { lower: 1.9, upper: 2.4 } } }, study)
    expect((shadeLeft?.x ?? 0) + (shadeLeft?.width ?? 0)).toBeCloseTo(pane?.x ?? -1, 9)
    expect((pane?.x ?? 0) + (pane?.width ?? 0)).toBeCloseTo(shadeRight?.x ?? -1, 9)
    expect(assuredPane?.x).toBeGreaterThan(pane?.x ?? 0)
  })

  it('marks where the printer cannot go', () => {
    expect(rulerGeometry({ ...content, printerRange: { min: 2, max: 60 } }, study).outOfReach).toHaveLength(1)
    expect(rulerGeometry({ ...content, printerRange: { min: 2, max: 4 } }, study).outOfReach).toHaveLength(2)
    expect(rulerGeometry(content, study).outOfReach).toHaveLength(0)
  })

  it('stands with nothing to show, or with one dot only', () => {
    const empty: RulerContent = { exposureKind: 'seconds', step: 0.1, dots: [], answer: null, chosenStep: null }
    expect(rulerGeometry(empty, study).ticks.length).toBeGreaterThan(2)
    const one = rulerGeometry({ ...empty, dots: [{ exposure: 3, state: 'used' }] }, study)
    expect(one.domain.max / one.domain.min).toBeCloseTo(2.5, 9)
  })

  it('piles films of one exposure on each other', () => {
    const { dots } = rulerGeometry({ ...content, dots: [2, 2, 2].map(exposure => ({ exposure, state: 'used' as const })) }, study)
    expect(new Set(dots.map(dot => dot.x)).size).toBe(1)
    expect(new Set(dots.map(dot => dot.y)).size).toBe(3)
  })
})

describe('rulerSentence', () => {
  it('says what the drawing shows', () => {
    expect(rulerSentence(content)).toBe('Exposure ruler. 2 films from 1.60 s to 8.20 s. 1 excluded. 1 did not form or was lost. The films ask for 2.05 s, 1.94 to 2.17. Printer step to use: 2.10 s.')
  })

  it('never gives two ends where the films leave one open', () => {
    expect(rulerSentence({ ...content, answer: { value: 2, interval: { kind: 'unbounded' } } })).toContain('not determined')
  })

  it('says when nothing is measured yet', () => {
    expect(rulerSentence({ ...content, dots: [], answer: null, chosenStep: null })).toBe('Exposure ruler. No film is measured yet.')
  })
})
