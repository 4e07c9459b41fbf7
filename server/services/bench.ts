import type { Attention, Bench, BenchStudy } from '#shared/contracts/bench.ts'
import { filmFitInputs, layerRuleOf } from '#shared/contracts/film-fit-inputs.ts'
import { exposureForLayer, fitWorkingCurve } from '#shared/film/index.ts'
import type { Dependencies } from '../dependencies.ts'
import { readBench } from '../repositories/bench.ts'
import type { ShopActor } from './actor.ts'

type Facts = Awaited<ReturnType<typeof readBench>>
type StudyFacts = Facts['studies'][number]

const soonDays = 30
const day = 86_400_000

/** What a shop knows of each pairing, and what waits for somebody, most urgent first. */
export async function benchOf(dependencies: Pick<Dependencies, 'database' | 'clock'>, actor: ShopActor): Promise<Bench> {
  const facts = await readBench(dependencies.database, actor.shopId)
  const readingsOf = groupBy(facts.readings, reading => reading.studyId)
  const printerOf = new Map(facts.printers.map(printer => [printer.id, printer]))
  const resinOf = new Map(facts.resins.map(resin => [resin.id, resin]))
  const studiesOf = groupBy(facts.studies, study => study.pairingId)
  // A pairing whose printer or resin is retired has no place on the bench; its studies stay in the list of studies.
  const pairings = facts.pairings.filter(pairing => printerOf.has(pairing.printerId) && resinOf.has(pairing.resinId))

  const attention: Attention[] = []
  const shown = pairings.map(pairing => {
    const printer = printerOf.get(pairing.printerId)
    const studies = (studiesOf.get(pairing.id) ?? []).map(study => {
      const summary = summarise(study, readingsOf.get(study.id) ?? [], printer?.exposureStepSeconds ?? 0.1)
      attention.push(...waiting(study, summary, dependencies.clock()))
      return summary
    })
    if (studies.length === 0) {
      attention.push({
        kind: 'no-study-yet', studyId: null, pairingId: pairing.id, lotId: null,
        sentence: `${printer?.name ?? ''} with ${resinOf.get(pairing.resinId)?.name ?? ''}: nothing is known yet. Open a study.`,
      })
    }
    return { ...pairing, studies }
  })
  attention.sort((a, b) => urgency.indexOf(a.kind) - urgency.indexOf(b.kind))
  return { printers: facts.printers, resins: facts.resins, pairings: shown, attention: attention.slice(0, 200) }
}

const urgency: readonly Attention['kind'][] = ['lot-expired', 'films-to-measure', 'film-fit-doubtful', 'films-to-print', 'decide', 'lot-expires-soon', 'no-study-yet']

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

function summarise(study: StudyFacts, readings: readonly Facts['readings'][number][], stepSeconds: number): BenchStudy {
  const outcome = fitWorkingCurve(filmFitInputs(study, readings.map(reading => ({ ...reading, id: '' }))))
  const base = {
    id: study.id, name: study.name, state: study.state, layerHeightMicrometres: study.layerHeightMicrometres, lotCode: study.lotCode,
    exposureKind: study.exposureKind, updatedAt: study.updatedAt,
    filmsMeasured: study.readingCount,
    filmsPlanned: countFilmsToCome(study.film, readings),
  }
  if (readings.length === 0) return { ...base, film: { kind: 'none' } }
  if (outcome.kind === 'refused') return { ...base, film: { kind: 'refused', detail: outcome.detail } }
  const layer = exposureForLayer(outcome, { layerHeightMicrometres: study.layerHeightMicrometres, rule: layerRuleOf(study.film) })
  return {
    ...base,
    film: {
      kind: 'fitted',
      penetrationDepthMicrometres: { value: outcome.penetrationDepthMicrometres.value, interval: wire(outcome.penetrationDepthMicrometres.interval) },
      criticalExposure: { value: outcome.criticalExposure.value, interval: wire(outcome.criticalExposure.interval) },
      exposureForLayer: { value: layer.value, interval: wire(layer.meanInterval) },
      exposureOnStepSeconds: study.exposureKind === 'seconds' ? Number((Math.max(1, Math.round(layer.value / stepSeconds)) * stepSeconds).toPrecision(12)) : null,
      extrapolated: layer.extrapolated,
      findings: outcome.findings.filter(finding => finding.severity !== 'info').map(({ severity, sentence }) => ({ severity, sentence })),
    },
  }
}

/** The contract's interval has a pair of plain numbers. */
function wire(interval: { kind: 'finite'; lower: number; upper: number } | { kind: 'exclusive'; roots: readonly [number, number] } | { kind: 'unbounded' }) {
  return interval.kind === 'exclusive' ? { kind: 'exclusive' as const, roots: [interval.roots[0], interval.roots[1]] as [number, number] } : interval
}

function waiting(study: StudyFacts, summary: BenchStudy, now: Date): Attention[] {
  if (study.state !== 'open') return []
  const of = { studyId: study.id, pairingId: study.pairingId, lotId: study.lotId }
  const list: Attention[] = []
  if (study.lotExpiresOn !== null) {
    const days = Math.floor((Date.parse(study.lotExpiresOn) - now.getTime()) / day) + 1
    if (days < 0) list.push({ ...of, kind: 'lot-expired', sentence: `${study.name}: lot ${study.lotCode ?? ''} expired ${-days} ${days === -1 ? 'day' : 'days'} ago. Finish with a lot in date.` })
    else if (days <= soonDays) list.push({ ...of, kind: 'lot-expires-soon', sentence: `${study.name}: lot ${study.lotCode ?? ''} expires in ${days} ${days === 1 ? 'day' : 'days'}.` })
  }
  if (summary.filmsPlanned > 0) {
    const films = summary.filmsPlanned === 1 ? 'one planned film is' : `${summary.filmsPlanned} planned films are`
    list.push({ ...of, kind: 'films-to-measure', sentence: `${study.name}: ${films} not measured yet.` })
  } else if (summary.film.kind === 'none') {
    list.push({ ...of, kind: 'films-to-print', sentence: `${study.name}: no film is planned or measured yet. Plan the first films.` })
  } else if (summary.film.kind === 'refused') {
    list.push({ ...of, kind: 'film-fit-doubtful', sentence: `${study.name}: ${summary.film.detail}` })
  } else {
    const serious = summary.film.findings.find(finding => finding.severity === 'serious')
    if (serious !== undefined) list.push({ ...of, kind: 'film-fit-doubtful', sentence: `${study.name}: ${serious.sentence}` })
    else list.push({ ...of, kind: 'decide', sentence: `${study.name}: the film curve is fitted. Decide the exposure for ${study.layerHeightMicrometres} µm layers.` })
  }
  return list
}

function groupBy<T>(rows: readonly T[], keyOf: (row: T) => string): Map<string, T[]> {
  const groups = new Map<string, T[]>()
  for (const row of rows) {
    const group = groups.get(keyOf(row))
    if (group === undefined) groups.set(keyOf(row), [row])
    else group.push(row)
  }
  return groups
}
