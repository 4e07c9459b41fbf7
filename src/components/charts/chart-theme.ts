/** Colours and fonts that charts take from the page's tokens. */
export interface ChartTheme {
  readonly ink: string
  readonly inkSoft: string
  readonly line: string
  readonly lineStrong: string
  readonly surface: string
  readonly light: string
  readonly lightBand: string
  readonly lightBandOuter: string
  readonly action: string
  readonly caution: string
  readonly form: string
  readonly open: string
  readonly fontText: string
  readonly fontNumber: string
  /** False where the person asked for less motion. */
  readonly motion: boolean
}

const tokenOf = {
  ink: '--ink', inkSoft: '--ink-soft', line: '--line', lineStrong: '--line-strong', surface: '--surface', light: '--light', lightBand: '--light-band',
  lightBandOuter: '--light-band-outer', action: '--action-strong', caution: '--caution', form: '--form', open: '--open', fontText: '--font-text', fontNumber: '--font-number',
} as const

/** Reads the tokens as they stand now; asked again when the theme changes. */
export function readChartTheme(element: Element = document.documentElement): ChartTheme {
  const style = getComputedStyle(element)
  const value = (name: keyof typeof tokenOf) => style.getPropertyValue(tokenOf[name]).trim()
  return {
    ink: value('ink'), inkSoft: value('inkSoft'), line: value('line'), lineStrong: value('lineStrong'), surface: value('surface'), light: value('light'),
    lightBand: value('lightBand'), lightBandOuter: value('lightBandOuter'), action: value('action'), caution: value('caution'), form: value('form'), open: value('open'),
    fontText: value('fontText'), fontNumber: value('fontNumber'), motion: !window.matchMedia('(prefers-reduced-motion: reduce)').matches,
  }
}
