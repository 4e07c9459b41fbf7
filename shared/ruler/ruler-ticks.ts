import { formatNumber, significantDecimals } from '../format.ts'
import type { RulerScale } from './ruler-scale.ts'
import type { RulerTick } from './types.ts'

/** Round multiples first: where there is no room for all steps, the roundest keep their place. */
const roundness = [1000, 500, 200, 100, 50, 20, 10, 5, 2, 1]
/** More candidates than this on one level cannot all be drawn on any screen. */
const candidatesMax = 4000

const tickLengths = { label: 9, plain: 5 }

/** Decimals that the step needs: 0.1 needs one, 0.05 two. */
function decimalsOfStep(step: number): number {
  for (let decimals = 0; decimals < 6; decimals++) if (Math.abs(step * 10 ** decimals - Math.round(step * 10 ** decimals)) < 1e-9) return decimals
  return 6
}

/**
 * Ticks at the printer's steps, thinned so that neighbours stay apart; labels thinned further.
 *
 * @param options.gap - pixels between ticks at least
 * @param options.labelGap - pixels between labels at least
 */
export function rulerTicks(scale: RulerScale, step: number, options: { readonly gap: number; readonly labelGap: number }): readonly RulerTick[] {
  const placed: { x: number; exposure: number }[] = []
  const labelled = new Set<number>()
  const farFrom = (x: number, others: readonly number[], gap: number) => others.every(other => Math.abs(other - x) >= gap)
  const decimals = decimalsOfStep(step)
  // Decades above a thousand steps: mJ/cm² rulers with tiny steps reach them.
  const levels = [1e5, 1e4, ...roundness].filter(multiple => scale.max / (multiple * step) >= 1)
  for (const multiple of levels) {
    const spacing = multiple * step
    const first = Math.ceil(scale.min / spacing - 1e-9)
    const last = Math.floor(scale.max / spacing + 1e-9)
    if (last - first > candidatesMax) continue
    for (let k = Math.max(1, first); k <= last; k++) {
      const exposure = Number((k * spacing).toPrecision(12))
      const x = scale.x(exposure)
      if (!farFrom(x, placed.map(tick => tick.x), options.gap)) continue
      placed.push({ x, exposure })
      if (farFrom(x, [...labelled], options.labelGap)) labelled.add(x)
    }
  }
  return placed
    .sort((a, b) => a.x - b.x)
    .map(({ x, exposure }) =>
      labelled.has(x) ? { x, exposure, length: tickLengths.label, label: formatNumber(exposure, exposure >= 10 && Number.isInteger(exposure) ? 0 : Math.min(decimals, Math.max(0, significantDecimals(exposure, 3)))) } : { x, exposure, length: tickLengths.plain })
}
