import { createHash } from 'node:crypto'
import { z } from 'zod'
import { benchStudySchema, type BenchStudy } from '#shared/contracts/bench.ts'
import { filmFitInputs } from '#shared/contracts/film-fit-inputs.ts'
import { answerFindings, exposureOnPrinter, filmLibraryVersion, fitWorkingCurve, type Interval } from '#shared/film/index.ts'
import { StatsError } from '#shared/stats/index.ts'
import type { Dependencies } from '../dependencies.ts'
import { loggable } from '../loggable.ts'
import { keepBenchSums, readBenchReadings, type BenchFacts, type BenchReading, type BenchSumToKeep } from '../repositories/bench.ts'
import { studyAnswer } from './film-fit.ts'
import { groupBy } from './group-by.ts'

type StudyFacts = BenchFacts['studies'][number]
type PrinterFacts = Pick<BenchFacts['printers'][number], 'exposureStepSeconds' | 'exposureSecondsMin' | 'exposureSecondsMax' | 'irradianceMilliwattsPerSquareCentimetre'>

/** What the readings of a study come to; kept until readings, settings, printer or library change. */
const benchSumSchema = z.object({
  film: benchStudySchema.shape.film,
  filmsMeasured: z.int(),
  filmsPlanned: z.int(),
  /** Refused only because there are too few films yet. */
  tooFewFilms: z.boolean(),
})
export type BenchSum = z.infer<typeof benchSumSchema>

/** Changes when the same readings would make another sum: kept sums of another version are made anew. */
const sumVersion = `${filmLibraryVersion}/bench-1`

/** As the readings' own exposures: beyond it a number is too large to be meant. */
const valueMax = 1e9

/** Everything that a sum rests on; the readings stand in it by their revision. */
function hashOf(study: StudyFacts, printer: PrinterFacts): string {
  const { weighting, confidenceLevel, columnsAre, useCensored, model, layerRule, overcureMicrometres, depthRatio, plan } = study.film
  const canonical = JSON.stringify([
    study.readingsRevision, study.exposureKind, study.layerHeightMicrometres, weighting, confidenceLevel, columnsAre, useCensored, model, layerRule, overcureMicrometres, depthRatio,
    plan?.exposures ?? [], printer.exposureStepSeconds, printer.exposureSecondsMin, printer.exposureSecondsMax, printer.irradianceMilliwattsPerSquareCentimetre,
  ])
  return createHash('sha256').update(canonical).digest('hex')
}

/** Other calls are served between two studies when summing up takes longer than this. */
const breathMilliseconds = 20

/** The sums of all studies: kept ones as they are, the others from their readings, which are asked for at once. */
export async function benchSums(
  dependencies: Pick<Dependencies, 'database' | 'logger'>,
  shopId: string,
  studies: readonly { readonly study: StudyFacts; readonly printer: PrinterFacts }[],
): Promise<ReadonlyMap<string, BenchSum>> {
  const sums = new Map<string, BenchSum>()
  const missing: { study: StudyFacts; printer: PrinterFacts; inputsHash: string }[] = []
  for (const { study, printer } of studies) {
    const inputsHash = hashOf(study, printer)
    const kept = study.keptHash === inputsHash && study.keptLibraryVersion === sumVersion ? benchSumSchema.safeParse(study.kept) : null
    if (kept?.success === true) sums.set(study.id, kept.data)
    else missing.push({ study, printer, inputsHash })
  }
  if (missing.length === 0) return sums

  const readings = groupBy(await readBenchReadings(dependencies.database, shopId, missing.map(({ study }) => study.id)), reading => reading.studyId)
  const toKeep: BenchSumToKeep[] = []
  let lastBreath = performance.now()
  for (const { study, printer, inputsHash } of missing) {
    const sum = sumUp(study, printer, readings.get(study.id) ?? [])
    sums.set(study.id, sum)
    toKeep.push({ studyId: study.id, inputsHash, libraryVersion: sumVersion, readingsRevision: study.readingsRevision, outcome: sum })
    if (performance.now() - lastBreath > breathMilliseconds) {
      await new Promise(resolve => setImmediate(resolve))
      lastBreath = performance.now()
    }
  }
  try {
    await keepBenchSums(dependencies.database, shopId, toKeep)
  } catch (error) {
    // The sums are right all the same; the next bench makes them again.
    dependencies.logger.warn({ err: loggable(error) }, 'the sums of a bench could not be kept')
  }
  return sums
}

/** A plan asks for several films of one exposure: each film that is there answers for one of them. */
function countFilmsToCome(film: StudyFacts['film'], readings: readonly { readonly exposure: number }[]): number {
  const there = new Map<number, number>()
  for (const { exposure } of readings) there.set(exposure, (there.get(exposure) ?? 0) + 1)
  return (film.plan?.exposures ?? []).filter(exposure => {
    const left = there.get(exposure) ?? 0
    if (film.columnsAre === 'films') there.set(exposure, left - 1)
    return left <= 0
  }).length
}

function sumUp(study: StudyFacts, printer: PrinterFacts, readings: readonly BenchReading[]): BenchSum {
  const base = { filmsMeasured: readings[0]?.readingCount ?? 0, filmsPlanned: countFilmsToCome(study.film, readings) }
  if (readings.length === 0) return { ...base, film: { kind: 'none' }, tooFewFilms: false }
  try {
    return { ...base, ...fitted(study, printer, readings) }
  } catch (error) {
    // One study with odd numbers must not take the bench from all others.
    if (!(error instanceof StatsError)) throw error
    return { ...base, ...refused(`The films cannot be fitted: ${error.message}.`) }
  }
}

const refused = (detail: string, tooFewFilms = false): Pick<BenchSum, 'film' | 'tooFewFilms'> => ({ film: { kind: 'refused', detail }, tooFewFilms })

function fitted(study: StudyFacts, printer: PrinterFacts, readings: readonly BenchReading[]): Pick<BenchSum, 'film' | 'tooFewFilms'> {
  const inputs = filmFitInputs(study, readings.map(reading => ({ ...reading, id: '' })))
  const straight = fitWorkingCurve(inputs)
  if (straight.kind === 'refused') return refused(straight.detail, ['no-films', 'one-film', 'one-exposure'].includes(straight.reason))
  const { curve, exposure: answer } = studyAnswer(study, inputs, straight)
  if (answer.kind === 'refused') return refused(answer.detail)
  const numbers = curve.name === 'with-missing-films' ? curve.fit : straight
  const estimates = {
    penetrationDepthMicrometres: estimate(numbers.penetrationDepthMicrometres.value, numbers.penetrationDepthMicrometres.interval),
    criticalExposure: estimate(numbers.criticalExposure.value, numbers.criticalExposure.interval),
    exposureForLayer: estimate(answer.value, answer.meanInterval),
  }
  if (Object.values(estimates).some(({ value }) => !(value > 0 && value <= valueMax))) {
    return refused(`The films give no usable exposure for ${study.layerHeightMicrometres} µm layers. Check their exposures and thicknesses.`)
  }
  const findings = [...answerFindings(straight, { ...answer, singleInterval: answer.singleInterval ?? { kind: 'unbounded' } }), ...straight.findings]
  return {
    tooFewFilms: false,
    film: {
      kind: 'fitted', ...estimates,
      exposureOnStepSeconds: secondsOnPrinter(answer.value, study.exposureKind, printer),
      extrapolated: answer.extrapolated,
      findings: [
        ...(curve.remark === null ? [] : [{ severity: 'caution' as const, sentence: curve.remark }]),
        ...findings.filter(finding => finding.severity !== 'info').map(({ severity, sentence }) => ({ severity, sentence })),
      ],
    },
  }
}

function secondsOnPrinter(exposure: number, kind: BenchStudy['exposureKind'], printer: PrinterFacts): number | null {
  const irradiance = printer.irradianceMilliwattsPerSquareCentimetre
  if (kind === 'mJ/cm2' && irradiance === null) return null
  const seconds = kind === 'seconds' || irradiance === null ? exposure : exposure / irradiance
  return exposureOnPrinter(seconds, { step: printer.exposureStepSeconds, min: printer.exposureSecondsMin, max: printer.exposureSecondsMax }).step
}

/** An end beyond all numbers is no end; the contract's interval has a pair of plain numbers. */
function estimate(value: number, interval: Interval): { value: number; interval: { kind: 'finite'; lower: number; upper: number } | { kind: 'exclusive'; roots: [number, number] } | { kind: 'unbounded' } } {
  const [low, high] = interval.kind === 'finite' ? [interval.lower, interval.upper] : interval.kind === 'exclusive' ? interval.roots : [NaN, NaN]
  if (interval.kind === 'unbounded' || !Number.isFinite(low) || !Number.isFinite(high)) return { value, interval: { kind: 'unbounded' } }
  return { value, interval: interval.kind === 'finite' ? { kind: 'finite', lower: low, upper: high } : { kind: 'exclusive', roots: [low, high] } }
}
