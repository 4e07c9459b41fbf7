import { formatEstimate, formatExposure, formatLength, formatNumber } from '#shared/format.ts'
import type { RulerContent } from '#shared/ruler/index.ts'
import type { Study } from '#shared/contracts/studies.ts'
import type { ChartPoint, FilmAnswer, PrinterLimits, ShownExposure } from '@/workers/film-answer-types.ts'
import { ruleLabel } from './film-words.ts'

type Sureness = { readonly word: string; readonly kind: 'good' | 'caution' | 'serious' | 'info'; readonly sentence: string }

/** A ruler piles so many films of one exposure; more exposures than this would be a bar. */
const dotsPerExposure = 4
const exposuresMax = 120

/** Films for the ruler: few of each exposure, and the whole range of exposures. */
function dotsOf(points: readonly ChartPoint[]): readonly ChartPoint[] {
  const taken = new Map<number, number>()
  const dots = points.filter(({ exposure }) => {
    const before = taken.get(exposure) ?? 0
    taken.set(exposure, before + 1)
    return before < dotsPerExposure
  })
  const stride = Math.ceil(taken.size / exposuresMax)
  return stride <= 1 ? dots : dots.filter((_, i) => i % stride === 0)
}

/** Upper over lower end of the interval, as "within 6 %": half the spread on the log scale. */
function halfWidthPercent(answer: ShownExposure): number | null {
  const { meanInterval: interval } = answer
  return interval.kind === 'finite' && interval.lower > 0 ? 100 * (Math.sqrt(interval.upper / interval.lower) - 1) : null
}

/** How sure the films are, judged by what a person could do about it. */
export function surenessOf(answer: ShownExposure, printer: PrinterLimits, degreesOfFreedom: number): Sureness {
  const percent = halfWidthPercent(answer)
  if (percent === null) return { word: 'Not determined.', kind: 'serious', sentence: 'The films do not limit the exposure on both sides yet.' }
  // Beyond a doubling a percentage says less than a factor; below the digits shown it would read as nothing at all.
  const within = percent > 100 ? `The interval spans a factor of ${formatNumber(1 + percent / 100, 1)} either way.` : percent < 0.05 ? 'The interval is within ± 0.1 %.' : `The interval is ± ${formatNumber(percent, percent < 9.95 ? 1 : 0)} % wide.`
  if (answer.extrapolated) return { word: 'Outside the films.', kind: 'caution', sentence: `${within} The depth lies outside what was measured.` }
  const { meanInterval: interval } = answer
  const steps = printer.step !== null && interval.kind === 'finite' ? (interval.upper - interval.lower) / printer.step : null
  if (steps !== null && steps <= 2) return { word: 'Sure to one printer step.', kind: 'good', sentence: within }
  if (percent <= 10) return { word: 'Good.', kind: 'good', sentence: within }
  if (percent <= 30) return { word: 'Rough.', kind: 'caution', sentence: `${within} Good for a first print, not for a decision.` }
  return { word: degreesOfFreedom < 3 ? 'Too few films.' : 'Very rough.', kind: 'serious', sentence: `${within} More films are needed.` }
}

/** A narrow interval around the wrong line is no good answer: what the films say against the curve comes first. */
function doubted(sureness: Sureness, answer: Extract<FilmAnswer, { kind: 'fitted' }>): Sureness {
  const serious = answer.findings.some(finding => finding.severity === 'serious')
  if (!serious || sureness.kind !== 'good') return sureness
  return { word: 'In doubt.', kind: 'caution', sentence: `${sureness.sentence} But the films speak against the curve: see “What the films say”.` }
}

function nextStep(study: Study, answer: FilmAnswer, sureness: Sureness | null, plannedLeft: number): string {
  if (plannedLeft > 0) return `Expose and measure the ${plannedLeft === 1 ? 'last planned film' : `${plannedLeft} planned films still open`}.`
  if (answer.kind === 'refused' && answer.implausible.length === 0) return answer.detail
  if (answer.implausible.length > 0) return `Look at the ${answer.implausible.length === 1 ? 'marked film' : `${answer.implausible.length} marked films`} again: measure once more, or exclude with a reason.`
  if (sureness?.kind === 'serious') return 'Plan more films around the depth wanted.'
  if (answer.kind === 'fitted' && sureness?.word === 'Outside the films.') return `Add films near ${formatLength('kind' in answer.headline ? study.layerHeightMicrometres : answer.headline.depthMicrometres)}.`
  if (sureness?.word === 'In doubt.') return 'Read what the films say, and compare the other curves.'
  return 'Confirm it with a print: films tell depth, not fine features.'
}

/** The films' verdict as words; it follows each keystroke. */
export function verdictOf(study: Study, answer: FilmAnswer | null, printer: PrinterLimits, plannedLeft: number) {
  const nothing = { use: null, estimate: null, remarks: [], sureness: { word: 'Nothing to judge yet.', kind: 'info', sentence: '' } as Sureness }
  if (answer === null) return { ...nothing, what: '', next: 'Reading the films.' }
  if (answer.kind === 'refused') {
    const empty = answer.counts.measured === 0
    return { ...nothing, what: answer.detail, next: empty && plannedLeft === 0 ? 'Plan films, or type what you have measured.' : nextStep(study, answer, null, plannedLeft) }
  }
  const unit = study.exposureKind === 'seconds' ? 's' : 'mJ/cm²'
  const remarks = answer.curveRemark === null ? [] : [answer.curveRemark]
  const { headline } = answer
  if ('kind' in headline) return { ...nothing, what: headline.detail, remarks, next: 'Choose the straight line or another rule.' }
  const sureness = doubted(surenessOf(headline, printer, answer.numbers.degreesOfFreedom), answer)
  const decided = headline.meanInterval.kind === 'finite'
  if (study.exposureKind === 'mJ/cm2' && headline.step !== null) remarks.push(`The step in seconds rests on the printer’s irradiance, ${study.printer.irradianceMilliwattsPerSquareCentimetre} mW/cm², taken as exact.`)
  if (headline.beyondPrinter !== null) remarks.push(`This is ${headline.beyondPrinter === 'below' ? 'less than' : 'more than'} the printer can expose; its nearest step is shown.`)
  return {
    use: !decided ? null : headline.step === null ? formatExposure(headline.value, study.exposureKind) : stepText(headline.step, study),
    estimate: formatEstimate({ value: headline.value, interval: headline.meanInterval }, { unit }),
    what: `for ${formatLength(study.layerHeightMicrometres)} layers, ${ruleLabel(study.film)}; ${formatNumber(100 * study.film.confidenceLevel, 0)} % interval of the mean film`,
    sureness, remarks, next: nextStep(study, answer, sureness, plannedLeft),
  }
}

/** A printer step as the printer is told it: in seconds, also where the study counts mJ/cm². */
export function stepText(step: number, study: Pick<Study, 'exposureKind' | 'printer'>): string {
  const { exposureStepSeconds, irradianceMilliwattsPerSquareCentimetre: irradiance } = study.printer
  const decimals = decimalsOf(exposureStepSeconds)
  if (study.exposureKind === 'seconds') return `${formatNumber(step, decimals)} s`
  return irradiance === null ? formatExposure(step, study.exposureKind) : `${formatNumber(step / irradiance, decimals)} s`
}

/** What to set on the printer for an exposure that the study counts in mJ/cm²; null where it counts seconds, or nobody knows the irradiance. */
export function printerTime(exposure: number, study: Pick<Study, 'exposureKind' | 'printer'>): string | null {
  return study.exposureKind === 'seconds' || study.printer.irradianceMilliwattsPerSquareCentimetre === null ? null : stepText(exposure, study)
}

/** Decimals of a printer step: 0.05 has two. */
export function decimalsOf(step: number): number {
  for (let decimals = 0; decimals < 4; decimals++) if (Math.abs(step * 10 ** decimals - Math.round(step * 10 ** decimals)) < 1e-9) return decimals
  return 2
}

/** What the exposure ruler of a study shows. */
export function rulerOf(study: Study, answer: FilmAnswer | null, printer: PrinterLimits, planned: readonly number[]): RulerContent {
  const states = { measured: 'used', excluded: 'excluded', 'no-film': 'missing', 'lost-in-wash': 'missing' } as const
  const headline = answer?.kind === 'fitted' && !('kind' in answer.headline) ? answer.headline : null
  const range = printer.min === null || printer.max === null ? undefined : { min: printer.min, max: printer.max }
  return {
    exposureKind: study.exposureKind,
    step: printer.step,
    ...(range === undefined ? {} : { printerRange: range }),
    dots: [...dotsOf(answer?.points ?? []).map(point => ({ exposure: point.exposure, state: states[point.state] })), ...planned.map(exposure => ({ exposure, state: 'planned' as const }))],
    answer: headline === null ? null : { value: headline.value, interval: headline.meanInterval },
    chosenStep: headline === null || headline.meanInterval.kind !== 'finite' ? null : headline.step,
  }
}
