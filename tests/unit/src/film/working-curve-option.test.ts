import { describe, expect, it } from 'vitest'
import type { ChartTheme } from '@/components/charts/chart-theme.ts'
import { logTicks } from '@/components/charts/log-ticks.ts'
import { spreadLabels, workingCurveOption, type WorkingCurveChart } from '@/components/film/working-curve-option.ts'

const theme: ChartTheme = {
  ink: 'ink', inkSoft: 'soft', line: 'line', lineStrong: 'strong', surface: 'surface', light: 'light', lightBand: 'inner', lightBandOuter: 'outer',
  action: 'action', caution: 'caution', form: 'form', open: 'open', fontText: 'text', fontNumber: 'number', motion: true,
}
const chart: WorkingCurveChart = {
  exposureKind: 'seconds', confidenceLevel: 0.95, targetDepth: 100, answer: 2.05, planned: [2, 3], otherLine: null,
  points: [
    { id: 'a', exposure: 1.6, depth: 60, state: 'measured', marked: false },
    { id: 'b', exposure: 2.9, depth: 150, state: 'excluded', marked: false },
    { id: 'c', exposure: 1.2, depth: 0, state: 'no-film', marked: false },
    { id: 'd', exposure: 8.2, depth: 320, state: 'measured', marked: true },
    { id: 'e', exposure: 1.3, depth: 0, state: 'lost-in-wash', marked: false },
  ],
  line: [1.5, 3, 9].map(exposure => ({ exposure, depth: 160 * Math.log(exposure / 1.1), confidence: [0, 10] as const, prediction: [-5, 15] as const })),
}
const seriesOf = (option: ReturnType<typeof workingCurveOption>) => (Array.isArray(option.series) ? option.series : [])
const named = (name: string, given = chart) => seriesOf(workingCurveOption(given, theme)).find(series => series.name === name)

describe('working-curve chart', () => {
  it('stands on ln exposure and labels it with real seconds', () => {
    const { xAxis } = workingCurveOption(chart, theme)
    expect(xAxis).toMatchObject({ type: 'value' })
    const axis = Array.isArray(xAxis) ? xAxis[0] : xAxis
    const formatter = axis?.axisLabel?.formatter
    expect(typeof formatter === 'function' ? Reflect.apply(formatter, undefined, [Math.log(2.5), 0]) : null).toBe('2.5')
  })

  it('draws measured films filled, excluded ones hollow, missing ones by their own shapes at the foot', () => {
    expect(named('film')).toMatchObject({ symbol: 'circle' })
    expect(named('excluded film')).toMatchObject({ symbol: 'emptyCircle', data: [{ name: 'b' }] })
    expect(named('no film formed')).toMatchObject({ symbol: 'triangle', data: [{ value: [Math.log(1.2), 0] }] })
    expect(named('lost in wash')).toMatchObject({ symbol: 'diamond', data: [{ value: [Math.log(1.3), 0] }] })
  })

  it('marks an implausible film and keeps it', () => {
    expect(named('film')).toMatchObject({ data: [{ name: 'a' }, { name: 'd', itemStyle: { borderColor: 'caution' } }] })
  })

  it('draws the prediction band outside, in its own tone, and nothing where there is no interval', () => {
    const names = seriesOf(workingCurveOption(chart, theme)).map(series => series.name)
    expect(names.indexOf('one new film')).toBeLessThan(names.indexOf('mean'))
    const bare = { ...chart, line: chart.line.map(sample => ({ ...sample, confidence: null, prediction: null })) }
    expect(named('mean', bare)).toMatchObject({ data: [] })
  })

  it('closes the band: out along the lower edge and back along the upper', () => {
    const band = named('mean')
    const render = band?.type === 'custom' ? band.renderItem : undefined
    const drawn = render?.call(undefined, {} as never, { coord: (value: number[]) => value } as never)
    expect(drawn).toMatchObject({ shape: { points: [[Math.log(1.5), 0], [Math.log(3), 0], [Math.log(9), 0], [Math.log(9), 10], [Math.log(3), 10], [Math.log(1.5), 10]] } })
  })

  it('shows the depth wanted, the answer and the planned exposures', () => {
    expect(named('fit')).toMatchObject({ markLine: { data: [{ yAxis: 100 }, { xAxis: Math.log(2.05) }] } })
    expect(named('planned (s)')).toMatchObject({ data: [[Math.log(2), 0], [Math.log(3), 0]] })
  })

  it('keeps still where the person asked for less motion', () => {
    expect(workingCurveOption(chart, { ...theme, motion: false }).animation).toBe(false)
  })

  it('stands without a line, without a target and without films', () => {
    expect(seriesOf(workingCurveOption({ ...chart, points: [], line: [], planned: [], targetDepth: null, answer: null }, theme)).length).toBeGreaterThan(0)
  })
})

describe('logTicks', () => {
  it('gives round values inside the range, as many as there is room for', () => {
    expect(logTicks(1.4, 9, 7)).toEqual([1.5, 2, 3, 5, 7])
    expect(logTicks(1.4, 9, 8)).toEqual([1.5, 2, 2.5, 3, 4, 5, 6, 8])
    expect(logTicks(0.5, 500, 8)).toEqual([1, 3, 10, 30, 100, 300])
    expect(logTicks(1.4, 9, 3).length).toBeLessThanOrEqual(3)
  })
})

describe('spreadLabels', () => {
  it('leaves labels that are far apart where they are, and pushes those that touch up by what is missing', () => {
    expect(spreadLabels([100, 200, 300], 1)).toEqual([0, 0, 0])
    expect(spreadLabels([100, 101, 102], 1)).toEqual([0, -14, -28])
  })
})
