import { rulerScale, type RulerScale } from './ruler-scale.ts'
import { rulerTicks } from './ruler-ticks.ts'
import type { RulerContent, RulerGeometry, RulerSize, RulerSpan } from './types.ts'

const shapes: Readonly<Record<RulerSize, { height: number; strip: number; side: number; dot: number; tickGap: number; labelGap: number }>> = {
  list: { height: 34, strip: 14, side: 6, dot: 2.5, tickGap: 9, labelGap: 46 },
  study: { height: 76, strip: 40, side: 12, dot: 4.5, tickGap: 7, labelGap: 48 },
  print: { height: 72, strip: 32, side: 10, dot: 3.5, tickGap: 7, labelGap: 52 },
}
/** Dots of one exposure stand on each other, up to so many. */
const stackMax = 4

/**
 * The exposure ruler as geometry: one function for every size and every medium.
 *
 * @param options.width - of the whole drawing, in pixels, at least 120
 * @example
 * rulerGeometry(content, { width: 640, size: 'study' }).ticks
 */
export function rulerGeometry(content: RulerContent, options: { readonly width: number; readonly size: RulerSize }): RulerGeometry {
  const shape = shapes[options.size]
  const width = Math.max(120, options.width)
  const strip = { x: shape.side, y: 8, width: width - 2 * shape.side, height: shape.strip }
  const scale = rulerScale(content, { left: strip.x, width: strip.width })
  const span = (lower: number, upper: number) => spanOf(scale, strip, lower, upper)
  const { answer, window, printerRange } = content
  return {
    width,
    height: shape.height,
    strip,
    domain: { min: scale.min, max: scale.max },
    ticks: content.step === null ? [] : rulerTicks(scale, content.step, { gap: shape.tickGap, labelGap: shape.labelGap }),
    dots: stackedDots(content, scale, { ...strip, radius: shape.dot }),
    band: answer?.interval.kind === 'finite' ? span(answer.interval.lower, answer.interval.upper) : null,
    answerX: answer === null ? null : scale.x(answer.value),
    mullionX: content.chosenStep === null ? null : scale.x(content.chosenStep),
    shadeLeft: window === undefined ? null : span(0, window.lower),
    shadeRight: window === undefined ? null : span(window.upper, Infinity),
    pane: window === undefined ? null : span(window.lower, window.upper),
    assuredPane: window?.assured === undefined ? null : span(window.assured.lower, window.assured.upper),
    outOfReach: printerRange === undefined ? [] : [span(0, printerRange.min), span(printerRange.max, Infinity)].filter(part => part !== null),
  }
}

/** A span cut to the strip; null where nothing of it is left. */
function spanOf(scale: RulerScale, strip: { readonly x: number; readonly width: number }, lower: number, upper: number): RulerSpan | null {
  const end = strip.x + strip.width
  const left = lower <= scale.min ? strip.x : scale.x(lower)
  const right = upper >= scale.max ? end : scale.x(upper)
  if (right <= strip.x || left >= end || right <= left) return null
  return { x: left, width: right - left, openLeft: lower < scale.min, openRight: upper > scale.max }
}

function stackedDots(content: RulerContent, scale: RulerScale, strip: { readonly y: number; readonly height: number; readonly radius: number }) {
  const heights = new Map<string, number>()
  return content.dots.flatMap(({ exposure, state }) => {
    const x = scale.x(exposure)
    const place = x.toFixed(0)
    const level = heights.get(place) ?? 0
    heights.set(place, level + 1)
    if (level >= stackMax) return []
    return [{ x, y: strip.y + strip.height - (level + 0.5) * 2 * strip.radius - 2, radius: strip.radius, state }]
  })
}
