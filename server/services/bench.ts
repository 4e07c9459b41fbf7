import type { Attention, Bench } from '#shared/contracts/bench.ts'
import type { Dependencies } from '../dependencies.ts'
import { readBench, type BenchFacts } from '../repositories/bench.ts'
import type { ShopActor } from './actor.ts'
import { mostUrgentFirst, restsOnRetired, waitingOfStudy } from './bench-attention.ts'
import { benchSums, type BenchSum } from './bench-sums.ts'
import { groupBy } from './group-by.ts'

/** A list that nobody reads to its end helps nobody. */
const attentionMax = 200

/** What a shop knows of each pairing, and what waits for somebody, most urgent first. */
export async function benchOf(dependencies: Pick<Dependencies, 'database' | 'clock' | 'logger'>, actor: ShopActor): Promise<Bench> {
  const facts = await readBench(dependencies.database, actor.shopId)
  const printerOf = new Map(facts.printers.map(printer => [printer.id, printer]))
  const resinOf = new Map(facts.resins.map(resin => [resin.id, resin]))
  const places = new Map(facts.pairings.flatMap(pairing => {
    const [printer, resin] = [printerOf.get(pairing.printerId), resinOf.get(pairing.resinId)]
    if (printer === undefined || resin === undefined) return []
    const retired = printer.retired ? printer.name : resin.retired ? resin.name : pairing.retired ? `${printer.name} with ${resin.name}` : null
    return [[pairing.id, { pairing, printer, resin, retired }] as const]
  }))
  const placed = facts.studies.flatMap(study => {
    const place = places.get(study.pairingId)
    return place === undefined ? [] : [{ study, ...place }]
  })
  // What is retired has no place in the grid; its studies stay in the list of studies.
  const shown = placed.filter(({ retired }) => retired === null)
  const sums = await benchSums(dependencies, actor.shopId, shown)
  const studiesOf = groupBy(shown, ({ pairing }) => pairing.id)
  const inGrid = [...places.values()].filter(({ retired }) => retired === null)

  const now = dependencies.clock()
  const attention: Attention[] = [
    ...placed.flatMap(({ study, retired }) => (retired === null ? waitingOfStudy(study, sumOf(sums, study), now) : restsOnRetired(study, retired))),
    ...inGrid.filter(({ pairing }) => !studiesOf.has(pairing.id)).map(({ pairing, printer, resin }): Attention => ({
      kind: 'no-study-yet', studyId: null, pairingId: pairing.id, lotId: null, sentence: `${printer.name} with ${resin.name}: nothing is known yet. Open a study.`,
    })),
  ]
  return {
    printers: facts.printers.filter(printer => !printer.retired),
    resins: facts.resins.filter(resin => !resin.retired),
    pairings: inGrid.map(({ pairing }) => ({ ...pairing, studies: (studiesOf.get(pairing.id) ?? []).map(({ study }) => asBenchStudy(study, sumOf(sums, study))) })),
    attention: mostUrgentFirst(attention, now, facts.studies).slice(0, attentionMax),
  }
}

function sumOf(sums: ReadonlyMap<string, BenchSum>, study: { readonly id: string }): BenchSum {
  const sum = sums.get(study.id)
  if (sum === undefined) throw new Error(`no sum of study ${study.id}`)
  return sum
}

function asBenchStudy(study: BenchFacts['studies'][number], { film, filmsMeasured, filmsPlanned }: BenchSum): Bench['pairings'][number]['studies'][number] {
  return {
    id: study.id, name: study.name, state: study.state, layerHeightMicrometres: study.layerHeightMicrometres, lotCode: study.lotCode,
    exposureKind: study.exposureKind, updatedAt: study.updatedAt, filmsMeasured, filmsPlanned, film,
  }
}
