import { computed, onScopeDispose, shallowRef, watch } from 'vue'
import type { Study } from '#shared/contracts/studies.ts'
import type { ComparisonsAnswer, FilmAnswer, FilmQuestion, PrinterLimits } from '@/workers/film-answer-types.ts'
import type { TypedOver } from '@/workers/reading-book.ts'
import { newestWins } from './newest-wins.ts'
import type { FilmWorkerHandle } from './useFilmWorker.ts'

const compareAfterMilliseconds = 350

/** What the printer can do, in the unit of the study's exposures: a dose needs the irradiance. */
export function printerLimits(study: Pick<Study, 'exposureKind' | 'printer'>): PrinterLimits {
  const { exposureStepSeconds, exposureSecondsMin, exposureSecondsMax, irradianceMilliwattsPerSquareCentimetre: irradiance } = study.printer
  const factor = study.exposureKind === 'seconds' ? 1 : irradiance
  if (factor === null) return { step: null, min: null, max: null }
  return { step: exposureStepSeconds * factor, min: exposureSecondsMin * factor, max: exposureSecondsMax * factor }
}

/** The answer that follows each keystroke, fitted in the worker; the newest request wins. */
export function useFilmAnswer(study: () => Study | undefined, over: () => TypedOver, readings: () => unknown, worker: FilmWorkerHandle) {
  const answer = shallowRef<FilmAnswer | null>(null)
  const comparisons = shallowRef<ComparisonsAnswer | null>(null)
  const failed = shallowRef<unknown>(null)
  const otherLayerHeightMicrometres = shallowRef<number | null>(null)
  let timer: ReturnType<typeof setTimeout> | undefined

  const question = computed((): FilmQuestion | null => {
    const now = study()
    if (now === undefined) return null
    return {
      exposureKind: now.exposureKind, film: now.film, layerHeightMicrometres: now.layerHeightMicrometres, printer: printerLimits(now),
      otherLayerHeightMicrometres: otherLayerHeightMicrometres.value,
    }
  })

  type Asked = { readonly question: FilmQuestion; readonly over: TypedOver }
  const fail = (error: unknown) => { failed.value = error }
  const compare = newestWins<Asked & { depth: number }, ComparisonsAnswer>(
    asked => worker.compare(asked.question, asked.over, asked.depth), next => { comparisons.value = next }, fail)
  const fit = newestWins<Asked, FilmAnswer>(asked => worker.answer(asked.question, asked.over), (next, asked) => {
    answer.value = next
    failed.value = null
    clearTimeout(timer)
    if (next.kind === 'refused') comparisons.value = null
    else timer = setTimeout(() => compare({ ...asked, depth: 'kind' in next.headline ? asked.question.layerHeightMicrometres : next.headline.depthMicrometres }), compareAfterMilliseconds)
  }, fail)

  watch([question, over, readings], () => {
    if (question.value !== null && readings() !== null) fit({ question: question.value, over: over() })
  }, { immediate: true })
  onScopeDispose(() => clearTimeout(timer))

  return { answer, comparisons, failed, question, otherLayerHeightMicrometres }
}
export type FilmAnswerHandle = ReturnType<typeof useFilmAnswer>
