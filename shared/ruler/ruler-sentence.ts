import { formatEstimate, formatExposure } from '../format.ts'
import type { RulerContent } from './types.ts'

const counted = (count: number, one: string, many: string) => `${count} ${count === 1 ? one : many}`

/**
 * The ruler as a sentence, for those who hear it.
 *
 * @example
 * rulerSentence(content) // => 'Exposure ruler. 6 films from 1.60 s to 8.20 s. The films ask for 2.05 s, 1.98 to 2.13. Printer step to use: 2.10 s.'
 */
export function rulerSentence(content: RulerContent): string {
  const { exposureKind, dots, answer, chosenStep, window } = content
  const show = (exposure: number) => formatExposure(exposure, exposureKind)
  const unit = exposureKind === 'seconds' ? 's' : 'mJ/cm²'
  const parts = ['Exposure ruler.']
  const of = (state: (typeof dots)[number]['state']) => dots.filter(dot => dot.state === state)
  const used = of('used')
  if (used.length > 0) {
    const exposures = used.map(dot => dot.exposure).sort((a, b) => a - b)
    const [low, high] = [exposures[0] ?? 0, exposures.at(-1) ?? 0]
    parts.push(`${counted(used.length, 'film', 'films')} ${low === high ? `at ${show(low)}` : `from ${show(low)} to ${show(high)}`}.`)
  } else {
    parts.push('No film is measured yet.')
  }
  const excluded = of('excluded').length
  const missing = of('missing').length
  const planned = of('planned').length
  if (excluded > 0) parts.push(`${excluded} excluded.`)
  if (missing > 0) parts.push(`${missing} did not form or ${missing === 1 ? 'was' : 'were'} lost.`)
  if (planned > 0) parts.push(`${planned} planned.`)
  if (answer !== null) parts.push(`The films ask for ${formatEstimate(answer, { unit })}.`)
  if (window !== undefined) parts.push(`The window is ${show(window.lower)} to ${show(window.upper)}${window.assured === undefined ? '' : `, assured from ${show(window.assured.lower)} to ${show(window.assured.upper)}`}.`)
  if (chosenStep !== null) parts.push(`Printer step to use: ${show(chosenStep)}.`)
  return parts.join(' ')
}
