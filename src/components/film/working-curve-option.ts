import { formatExposure, formatLength, formatNumber } from '#shared/format.ts'
import type { ChartOption } from '@/components/charts/echarts-parts.ts'
import type { ChartTheme } from '@/components/charts/chart-theme.ts'
import { logTicks } from '@/components/charts/log-ticks.ts'
import type { ChartPoint, CurveSample } from '@/workers/film-answer-types.ts'

export interface WorkingCurveChart {
  readonly exposureKind: 'seconds' | 'mJ/cm2'
  readonly confidenceLevel: number
  readonly points: readonly ChartPoint[]
  readonly line: readonly CurveSample[]
  readonly otherLine: { readonly label: string; readonly samples: readonly CurveSample[] } | null
  /** Exposures that the plan still asks for. */
  readonly planned: readonly number[]
  readonly targetDepth: number | null
  readonly answer: number | null
}

type Band = readonly (readonly [x: number, lower: number, upper: number])[]

const labelFor = { measured: 'film', excluded: 'excluded film', 'no-film': 'no film formed', 'lost-in-wash': 'lost in wash' } as const

/** Everything on the chart stands at ln exposure; labels turn it back. */
const at = Math.log

function bandOf(line: readonly CurveSample[], which: 'confidence' | 'prediction'): Band {
  return line.flatMap(sample => {
    const band = sample[which]
    return band === null ? [] : [[at(sample.exposure), band[0], band[1]] as const]
  })
}

function depthAxis(chart: WorkingCurveChart): { readonly min: number; readonly max: number } {
  let low = 0
  let high = chart.targetDepth ?? 100
  for (const point of chart.points) {
    low = Math.min(low, point.depth)
    high = Math.max(high, point.depth)
  }
  // The line ends inside the frame, so that its label stands there; a band as wide as the sky may leave it.
  const lineEnd = chart.line.at(-1)?.depth ?? 0
  high = Math.max(high, lineEnd, Math.min(bandOf(chart.line, 'prediction').at(-1)?.[2] ?? 0, 1.3 * lineEnd))
  const unit = high > 600 ? 200 : high > 250 ? 100 : high > 120 ? 50 : 20
  return { min: Math.floor(low / unit) * unit, max: Math.ceil((high * 1.06) / unit) * unit }
}

function exposureAxis(chart: WorkingCurveChart): { readonly min: number; readonly max: number } {
  const exposures = [...chart.points.map(point => point.exposure), ...chart.planned, ...chart.line.map(sample => sample.exposure), ...(chart.answer === null ? [] : [chart.answer])]
  let low = Infinity
  let high = -Infinity
  for (const exposure of exposures) {
    low = Math.min(low, exposure)
    high = Math.max(high, exposure)
  }
  return exposures.length === 0 ? { min: 1, max: 10 } : { min: low / 1.05, max: high * 1.05 }
}

/** A band as one closed shape, cut at the frame of the chart. */
function bandSeries(name: string, band: Band, colour: string) {
  return {
    type: 'custom' as const, name, silent: true, clip: true, z: 1, data: band.length === 0 ? [] : [0],
    renderItem: (_params: unknown, api: { coord: (value: number[]) => number[] }) => ({
      type: 'polygon' as const,
      shape: { points: [...band.map(([x, lower]) => api.coord([x, lower])), ...[...band].reverse().map(([x, , upper]) => api.coord([x, upper]))] },
      style: { fill: colour },
    }),
  }
}

/** Height of the drawing between its axes, as the wrapper makes it, and of a line of text, in pixels. */
const drawingPixels = 304
const textPixels = 15

/**
 * How far labels at the right end move so that none covers another: ascending depths in, pixels downwards out.
 *
 * The line of the chart keeps its place as far as it can; those above are pushed up.
 */
export function spreadLabels(depths: readonly number[], micrometresPerPixel: number): readonly number[] {
  let last = -Infinity
  return depths.map(depth => {
    const natural = depth / micrometresPerPixel
    const place = Math.max(natural, last + textPixels)
    last = place
    return natural - place
  })
}

/** A dashed edge whose end carries the band's name: labels stand where the eye is. */
function edgeSeries(label: string, band: Band, offset: number, theme: ChartTheme) {
  return {
    type: 'line' as const, name: label, silent: true, showSymbol: false, z: 2, data: band.map(([x, , upper]) => [x, upper]), lineStyle: { width: 1, type: 'dashed' as const, color: theme.light, opacity: 0.55 },
    endLabel: { show: band.length > 0, formatter: label, color: theme.inkSoft, fontSize: 12, offset: [0, offset] },
  }
}

function pointSeries(chart: WorkingCurveChart, theme: ChartTheme, floor: number) {
  const symbols = { measured: 'circle', excluded: 'emptyCircle', 'no-film': 'triangle', 'lost-in-wash': 'diamond' } as const
  return (['measured', 'excluded', 'no-film', 'lost-in-wash'] as const).map(state => {
    const missing = state === 'no-film' || state === 'lost-in-wash'
    return {
      type: 'scatter' as const, name: labelFor[state], z: 5, symbol: symbols[state], symbolSize: missing ? 11 : 9,
      ...(state === 'no-film' ? { symbolRotate: 180 } : {}),
      itemStyle: missing ? { color: 'transparent', borderColor: theme.inkSoft, borderWidth: 1.5 } : state === 'excluded' ? { color: theme.inkSoft } : { color: theme.ink },
      data: chart.points.filter(point => point.state === state).map(point => ({
        value: [at(point.exposure), missing ? floor : point.depth],
        name: point.id,
        ...(point.marked ? { symbolSize: 14, itemStyle: { color: theme.surface, borderColor: theme.caution, borderWidth: 3 } } : {}),
      })),
    }
  })
}

const symbolWords = { measured: '', excluded: ' (excluded)', 'no-film': ' (no film)', 'lost-in-wash': ' (lost in wash)' } as const

/**
 * The working-curve chart as data: films as points, fit as line, confidence as inner and prediction as outer band,
 * excluded films hollow, missing films by their shape at the foot, planned exposures as ticks, the target depth as a line.
 */
export function workingCurveOption(chart: WorkingCurveChart, theme: ChartTheme): ChartOption {
  const depth = depthAxis(chart)
  const exposure = exposureAxis(chart)
  const ticks = logTicks(exposure.min, exposure.max, 9).map(at)
  const unit = chart.exposureKind === 'seconds' ? 's' : 'mJ/cm²'
  const percent = `${formatNumber(100 * chart.confidenceLevel, Number.isInteger(Math.round(1000 * chart.confidenceLevel) / 10) ? 0 : 1)} %`
  const [inner, outer] = [bandOf(chart.line, 'confidence'), bandOf(chart.line, 'prediction')]
  const text = { color: theme.inkSoft, fontFamily: theme.fontNumber, fontSize: 12 }
  const perPixel = (depth.max - depth.min) / drawingPixels
  const end = (band: Band) => band.at(-1)?.[2] ?? 0
  const lineEnd = chart.line.at(-1)?.depth ?? 0
  const ends = [lineEnd, end(inner), end(outer), ...(chart.otherLine === null ? [] : [chart.otherLine.samples.at(-1)?.depth ?? 0])]
  const upwards = ends.map((_, i) => i).sort((a, b) => (ends[a] ?? 0) - (ends[b] ?? 0))
  const spread = spreadLabels(upwards.map(i => ends[i] ?? 0), perPixel)
  const offsetOf = (i: number) => spread[upwards.indexOf(i)] ?? 0
  const [lineOffset, meanOffset, oneOffset, otherOffset] = [0, 1, 2, 3].map(offsetOf)
  const byId = new Map(chart.points.map(point => [point.id, point]))
  return {
    animation: theme.motion, animationDuration: 160, animationDurationUpdate: 160,
    backgroundColor: 'transparent',
    textStyle: { fontFamily: theme.fontText, color: theme.ink },
    grid: { left: 56, right: 122, top: 34, bottom: 46 },
    xAxis: {
      type: 'value', min: at(exposure.min), max: at(exposure.max), name: chart.exposureKind === 'seconds' ? 'Exposure (s), log scale' : 'Radiant exposure (mJ/cm²), log scale',
      nameLocation: 'middle', nameGap: 30, nameTextStyle: { color: theme.inkSoft },
      axisLine: { lineStyle: { color: theme.lineStrong }, onZero: false }, splitLine: { show: false },
      axisTick: { show: true, customValues: ticks },
      axisLabel: { ...text, customValues: ticks, formatter: (value: number) => String(Number(Math.exp(value).toPrecision(3))) },
    },
    yAxis: {
      type: 'value', min: depth.min, max: depth.max, name: 'Cured depth (µm)', nameLocation: 'middle', nameGap: 42, nameTextStyle: { color: theme.inkSoft },
      axisLabel: text, axisLine: { show: true, lineStyle: { color: theme.lineStrong } }, splitLine: { lineStyle: { color: theme.line } },
    },
    tooltip: {
      trigger: 'item', backgroundColor: theme.surface, borderColor: theme.lineStrong, textStyle: { color: theme.ink, fontFamily: theme.fontText },
      formatter: (params: unknown) => {
        const point = typeof params === 'object' && params !== null && 'name' in params ? byId.get(String(params.name)) : undefined
        return point === undefined ? '' : `${formatExposure(point.exposure, chart.exposureKind)}: ${point.state === 'measured' || point.state === 'excluded' ? formatLength(point.depth) : ''}${symbolWords[point.state]}`
      },
    },
    series: [
      bandSeries('one new film', outer, theme.lightBandOuter),
      bandSeries('mean', inner, theme.lightBand),
      edgeSeries(`one film, ${percent}`, outer, oneOffset ?? 0, theme),
      edgeSeries(`mean, ${percent}`, inner, meanOffset ?? 0, theme),
      {
        type: 'line', name: 'fit', silent: true, showSymbol: false, z: 3, data: chart.line.map(sample => [at(sample.exposure), sample.depth]), lineStyle: { width: 2.5, color: theme.light },
        endLabel: { show: chart.line.length > 0, formatter: 'straight line', color: theme.light, fontSize: 12, fontWeight: 'bold', offset: [0, lineOffset ?? 0] },
        ...(chart.targetDepth === null ? {} : {
          markLine: {
            silent: true, symbol: 'none', animation: false, lineStyle: { color: theme.action, type: 'dashed', width: 1.5 },
            label: { color: theme.ink, position: 'insideStartTop', fontSize: 12 },
            data: [
              { yAxis: chart.targetDepth, label: { formatter: `depth wanted, ${formatLength(chart.targetDepth)}` } },
              ...(chart.answer === null ? [] : [{ xAxis: at(chart.answer), label: { formatter: formatExposure(chart.answer, chart.exposureKind), position: 'insideEndTop' as const, rotate: 90 } }]),
            ],
          },
        }),
      },
      ...(chart.otherLine === null ? [] : [{
        type: 'line' as const, name: chart.otherLine.label, silent: true, showSymbol: false, z: 4, data: chart.otherLine.samples.map(sample => [at(sample.exposure), sample.depth]),
        lineStyle: { width: 2, color: theme.form, type: 'dotted' as const },
        endLabel: { show: true, formatter: chart.otherLine.label, color: theme.form, fontSize: 12, fontWeight: 'bold' as const, offset: [0, otherOffset ?? 0] },
      }]),
      ...pointSeries(chart, theme, Math.max(0, depth.min)),
      {
        type: 'scatter', name: `planned (${unit})`, silent: true, z: 4, symbol: 'rect', symbolSize: [2, 14], itemStyle: { color: theme.action },
        data: chart.planned.map(value => [at(value), depth.min]), symbolOffset: [0, -7],
      },
    ],
  }
}
