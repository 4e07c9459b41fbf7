import type { RulerContent } from './types.ts'

export interface RulerScale {
  readonly min: number
  readonly max: number
  /** Pixels from the left edge of the drawing. */
  readonly x: (exposure: number) => number
}

/** Nothing narrower than this factor: one dot alone must not become a ruler of a thousandth of a second. */
const widthFactorMin = 2.5
/** Air at both ends, as a factor. */
const airFactor = 1.12
/** An open interval reaching to the moon must not squeeze everything else. */
const answerFactorMax = 3

/**
 * The log scale that holds everything a ruler shows.
 *
 * @example
 * rulerScale(content, { left: 8, width: 600 }).x(1.7)
 */
export function rulerScale(content: RulerContent, strip: { readonly left: number; readonly width: number }): RulerScale {
  const firm = [
    ...content.dots.map(dot => dot.exposure),
    ...(content.answer === null ? [] : [content.answer.value]),
    ...(content.chosenStep === null ? [] : [content.chosenStep]),
    ...(content.window === undefined ? [] : [content.window.lower, content.window.upper]),
  ].filter(exposure => exposure > 0 && Number.isFinite(exposure))
  let low = Infinity
  let high = -Infinity
  for (const exposure of firm) {
    low = Math.min(low, exposure)
    high = Math.max(high, exposure)
  }
  if (firm.length === 0) [low, high] = emptyRange(content)
  if (content.answer?.interval.kind === 'finite') {
    const { lower, upper } = content.answer.interval
    low = Math.min(low, Math.max(lower, content.answer.value / answerFactorMax))
    high = Math.max(high, Math.min(upper, content.answer.value * answerFactorMax))
  }
  const middle = Math.sqrt(low * high)
  const half = Math.sqrt(Math.max(widthFactorMin, (high / low) * airFactor ** 2))
  const [min, max] = [middle / half, middle * half]
  const perLog = strip.width / Math.log(max / min)
  return { min, max, x: exposure => strip.left + Math.log(exposure / min) * perLog }
}

function emptyRange(content: RulerContent): [number, number] {
  const step = content.step ?? 1
  return [Math.max(content.printerRange?.min ?? 0, 5 * step), 60 * step]
}
