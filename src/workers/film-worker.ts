import { expose } from 'comlink'
import { listFilmReadings, type StoredFilmReading } from '#shared/contracts/film.ts'
import { getStudy, type Study } from '#shared/contracts/studies.ts'
import { filmFitInputs } from '#shared/contracts/film-fit-inputs.ts'
import { compareWorkingCurves, exposureFromProven, exposureOnPrinter, fitWorkingCurve, planFilmExposures, printThrough, type FilmPlan, type WorkingCurveFit, type WorkingCurveOptions } from '#shared/film/index.ts'
import { ApiError, OfflineError, call } from '@/api/call.ts'
import { filmAnswer, filmInputs, rulesOf } from './film-answer.ts'
import type {
  ComparisonsAnswer, FilmAnswer, FilmQuestion, PrintThroughAnswer, PrinterLimits, ProvenAnswer, StudyComparisonAnswer,
} from './film-answer-types.ts'
import { filmComparisons } from './film-comparisons.ts'
import { ReadingBook, type GridPage, type GridWindow, type TypedOver } from './reading-book.ts'

interface StudyPlace {
  readonly shopId: string
  readonly studyId: string
}

export type LoadOutcome =
  | { readonly kind: 'loaded'; readonly total: number; readonly readingsRevision: number }
  | { readonly kind: 'failed'; readonly reason: 'offline' | 'signed-out' | 'other'; readonly sentence: string }

const book = new ReadingBook()
let place = ''
let lastFit: WorkingCurveFit | null = null
let lastInputs: WorkingCurveOptions | null = null
const noFit = { kind: 'refused', detail: 'There is no curve yet: measure films at three or more exposures.' } as const

function failureOf(error: unknown): LoadOutcome {
  if (error instanceof OfflineError) return { kind: 'failed', reason: 'offline', sentence: error.message }
  if (error instanceof ApiError) return { kind: 'failed', reason: error.problem.status === 401 ? 'signed-out' : 'other', sentence: error.problem.detail }
  return { kind: 'failed', reason: 'other', sentence: 'The readings could not be read. Reload the page.' }
}

async function readAll(params: StudyPlace, progress?: (loaded: number, total: number) => void) {
  const found: StoredFilmReading[] = []
  let revision = 0
  for (let cursor: string | null = null, first = true; first || cursor !== null; first = false) {
    const page: { items: StoredFilmReading[]; nextCursor: string | null; total: number; readingsRevision: number } = await call(listFilmReadings, { params, query: { limit: 10_000, ...(cursor === null ? {} : { cursor }) } })
    found.push(...page.items)
    progress?.(found.length, page.total)
    cursor = page.nextCursor
    revision = page.readingsRevision
  }
  return { found, revision }
}

/** The other study's readings come here, are fitted, and only the comparison goes back. */
async function fitOther(params: StudyPlace): Promise<{ readonly study: Study; readonly fit: WorkingCurveFit } | { readonly kind: 'refused'; readonly reason: string; readonly detail: string }> {
  const study = await call(getStudy, { params })
  const { found } = await readAll(params)
  const outcome = fitWorkingCurve(filmFitInputs(study, found))
  return outcome.kind === 'refused' ? { ...outcome, detail: `${study.name}: ${outcome.detail}` } : { study, fit: outcome }
}

/** Uniform from the browser's strong source: the order of films must not be guessable or repeat. */
function cryptoRandom(): number {
  const [bits = 0] = crypto.getRandomValues(new Uint32Array(1))
  return bits / 2 ** 32
}

export const filmWorker = {
  async load(params: StudyPlace, progress?: (loaded: number, total: number) => void): Promise<LoadOutcome> {
    try {
      const { found, revision } = await readAll(params, progress)
      book.replace(found)
      place = params.studyId
      return { kind: 'loaded', total: book.size, readingsRevision: revision }
    } catch (error) {
      return failureOf(error)
    }
  },

  /** Answers of the server to saved cells. */
  take(studyId: string, saved: readonly StoredFilmReading[], withdrawnIds: readonly string[]): void {
    if (studyId === place) book.take(saved, withdrawnIds)
  },

  page: (window: GridWindow): GridPage => book.page(window),

  answer(question: FilmQuestion, over: TypedOver): FilmAnswer {
    const readings = book.current(over)
    const { answer, fit } = filmAnswer(question, readings)
    lastFit = fit
    lastInputs = filmInputs(question, readings)
    return answer
  },

  compare: (question: FilmQuestion, over: TypedOver, depthMicrometres: number): ComparisonsAnswer => filmComparisons(question, book.current(over), depthMicrometres),

  proven(question: FilmQuestion, given: { readonly provenSeconds: number; readonly provenLayerHeightMicrometres: number; readonly layerHeightMicrometres: number; readonly provenStep: number | null }): ProvenAnswer {
    const fit = lastFit
    if (fit === null) return noFit
    const { provenStep, ...rest } = given
    // By its name the ratio rule takes the ratio of the proven exposure itself.
    const rules = [rulesOf(question.film)[0], 'constant-ratio', 'far-side-dose'] as const
    return {
      kind: 'answered',
      byRule: rules.map(rule => {
        const answer = exposureFromProven({ ...rest, fit, rule, ...(provenStep === null ? {} : { provenStepSeconds: Math.min(provenStep, given.provenSeconds) }) })
        return { ...answer, step: exposureOnPrinter(answer.value, question.printer).step }
      }),
    }
  },

  /** What the last answer was fitted to, for another model in another worker. */
  inputs: (): WorkingCurveOptions => lastInputs ?? { readings: [], exposureKind: 'seconds' },

  printThrough: (given: { readonly exposure: number; readonly layerHeightMicrometres: number; readonly layers: number; readonly recovery: number }): PrintThroughAnswer =>
    lastFit === null ? noFit : { kind: 'answered', ...printThrough({ fit: lastFit, ...given }) },

  /** The expected exposure at a depth by another study's films: where a plan may start from. */
  async expectedFrom(params: StudyPlace, depthMicrometres: number): Promise<{ readonly kind: 'answered'; readonly value: number; readonly penetrationDepthMicrometres: number; readonly exposureKind: Study['exposureKind'] } | { readonly kind: 'refused'; readonly detail: string }> {
    try {
      const other = await fitOther(params)
      if ('kind' in other) return other
      const dp = other.fit.penetrationDepthMicrometres.value
      return { kind: 'answered', value: other.fit.criticalExposure.value * Math.exp(depthMicrometres / dp), penetrationDepthMicrometres: dp, exposureKind: other.study.exposureKind }
    } catch (error) {
      const failure = failureOf(error)
      return { kind: 'refused', detail: failure.kind === 'failed' ? failure.sentence : '' }
    }
  },

  async compareStudies(params: StudyPlace, given: { readonly depthMicrometres: number; readonly wavelengthNanometres: number }): Promise<StudyComparisonAnswer> {
    if (lastFit === null) return { ...noFit, reason: 'no-fit' }
    const mine = lastFit
    try {
      const other = await fitOther(params)
      if ('kind' in other) return other
      const sameWavelength = other.study.printer.lightEngineWavelengthNanometres === given.wavelengthNanometres
      return compareWorkingCurves([other.fit, mine], { depthMicrometres: given.depthMicrometres, sameWavelength })
    } catch (error) {
      const failure = failureOf(error)
      return { kind: 'refused', reason: 'not-read', detail: failure.kind === 'failed' ? failure.sentence : '' }
    }
  },

  plan(given: {
    readonly expectedExposureAtTarget: number | null; readonly films: number; readonly printer: PrinterLimits; readonly gaugeRepeatabilityMicrometres: number | null
    readonly confidenceLevel: number; readonly penetrationDepthMicrometres: number | null; readonly filmSpreadMicrometres: number | null; readonly usualExposure: number | null
  }): FilmPlan {
    const { printer } = given
    // Without a step (a dose on a printer that nobody metered) plans are rounded to a hundredth.
    return planFilmExposures({
      expectedExposureAtTarget: given.expectedExposureAtTarget, films: given.films, stepSeconds: printer.step ?? 0.01, random: cryptoRandom,
      gaugeRepeatabilityMicrometres: given.gaugeRepeatabilityMicrometres, confidenceLevel: given.confidenceLevel,
      ...(printer.min === null ? {} : { exposureMin: printer.min }),
      ...(printer.max === null ? {} : { exposureMax: printer.max }),
      ...(given.penetrationDepthMicrometres === null ? {} : { penetrationDepthMicrometres: given.penetrationDepthMicrometres }),
      ...(given.filmSpreadMicrometres === null ? {} : { filmSpreadMicrometres: given.filmSpreadMicrometres }),
      ...(given.usualExposure === null ? {} : { usualExposure: given.usualExposure }),
    })
  },
}
export type FilmWorker = typeof filmWorker

expose(filmWorker)
