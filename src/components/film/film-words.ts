import { formatLength, formatNumber } from '#shared/format.ts'
import type { CompleteRule } from '#shared/film/index.ts'
import type { FilmSettings } from '#shared/contracts/studies.ts'
import type { CurveName } from '@/workers/film-answer-types.ts'

/** Names of the curves on the page. */
export const curveLabels: Readonly<Record<CurveName, string>> = {
  'straight-line': 'Straight line',
  'dead-time': 'Curve with a dead time',
  quadratic: 'Bent curve',
  'two-line': 'Curve for light of two kinds',
  'with-missing-films': 'Straight line with missing films',
}

/** The same, short enough for the end of a line on the chart. */
export const curveShortLabels: Readonly<Record<CurveName, string>> = {
  'straight-line': 'straight line',
  'dead-time': 'dead time',
  quadratic: 'bent curve',
  'two-line': 'two kinds of light',
  'with-missing-films': 'with missing films',
}

/** What each curve assumes, for those who must choose. */
export const curveExplanations: Readonly<Record<CurveName, string>> = {
  'straight-line': 'depth = Dp · ln(E / Ec): even absorption and one threshold.',
  'dead-time': 'depth = Dp · ln((t − t0) / tc): the first t0 seconds cure nothing, as when oxygen must be used up or the light comes late.',
  quadratic: 'A gentle bend on ln E, without a cause: to see how much the bend matters.',
  'two-line': 'Two kinds of light, one of which goes deeper: two lines of the source, or a broad one on a steep absorption edge.',
  'with-missing-films': 'The straight line, where films that did not form or were lost count as thinner than can be measured.',
}

export const ruleNames: Readonly<Record<CompleteRule['kind'], string>> = {
  'constant-overcure': 'Constant overcure',
  'constant-ratio': 'Constant ratio',
  'far-side-dose': 'Far-side dose',
}

/** A rule with its number. */
export function ruleText(rule: CompleteRule): string {
  if (rule.kind === 'constant-overcure') return `layer + ${formatLength(rule.overcureMicrometres)}`
  if (rule.kind === 'constant-ratio') return `${formatNumber(rule.ratio, 2)} × the layer`
  return `far side gets ${formatNumber(rule.doseRatio, 1)} × Ec`
}

export function ruleLabel(film: Pick<FilmSettings, 'layerRule' | 'overcureMicrometres' | 'depthRatio'>): string {
  if (film.layerRule === 'constant-overcure') return `cured ${formatLength(film.overcureMicrometres)} beyond the layer`
  if (film.layerRule === 'constant-ratio') return `cured to ${formatNumber(film.depthRatio, 2)} times the layer`
  return 'by the dose at the far side'
}

/** The model name in a study's settings for a curve's name. */
export const modelOfCurve = { 'straight-line': 'straight-line', 'dead-time': 'dead-time', quadratic: 'quadratic', 'two-line': 'two-line-attenuation' } as const
