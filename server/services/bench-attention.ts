import type { Attention } from '#shared/contracts/bench.ts'
import type { BenchFacts } from '../repositories/bench.ts'
import type { BenchSum } from './bench-sums.ts'

type StudyFacts = BenchFacts['studies'][number]

/** Most urgent first. */
const urgency: readonly Attention['kind'][] = [
  'lot-expired', 'rests-on-retired', 'films-to-measure', 'film-fit-doubtful', 'films-to-print', 'decide', 'lot-expires-soon', 'no-study-yet',
]
const soonDays = 30
const day = 86_400_000
const days = (count: number) => `${count} ${count === 1 ? 'day' : 'days'}`

/** Ordered by urgency; what has waited longest, or ends first, comes first among equals. */
export function mostUrgentFirst(list: readonly Attention[], now: Date, studies: readonly StudyFacts[]): Attention[] {
  const left = new Map(studies.map(study => [study.id, daysLeft(study, now) ?? 0]))
  const byLot = (item: Attention) => (item.kind.startsWith('lot-') ? (left.get(item.studyId ?? '') ?? 0) : 0)
  return [...list].sort((a, b) => urgency.indexOf(a.kind) - urgency.indexOf(b.kind) || byLot(a) - byLot(b))
}

/** Whole days until the lot of a study expires: 0 on the last day, below zero after it. */
function daysLeft(study: StudyFacts, now: Date): number | null {
  return study.lotExpiresOn === null ? null : Math.round((Date.parse(study.lotExpiresOn) - Date.parse(now.toISOString().slice(0, 10))) / day)
}

/** What an open study waits for. */
export function waitingOfStudy(study: StudyFacts, sum: BenchSum, now: Date): Attention[] {
  if (study.state !== 'open') return []
  const of = { studyId: study.id, pairingId: study.pairingId, lotId: study.lotId }
  const list: Attention[] = []
  const left = daysLeft(study, now)
  const lot = `${study.name}: lot ${study.lotCode ?? ''}`
  if (left !== null && left < 0) list.push({ ...of, kind: 'lot-expired', sentence: `${lot} expired ${days(-left)} ago. Finish with a lot in date.` })
  else if (left !== null && left <= soonDays) list.push({ ...of, kind: 'lot-expires-soon', sentence: left === 0 ? `${lot} expires today.` : `${lot} expires in ${days(left)}.` })
  list.push({ ...of, ...nextStep(study, sum) })
  return list
}

function nextStep(study: StudyFacts, { film, filmsPlanned, tooFewFilms }: BenchSum): Pick<Attention, 'kind' | 'sentence'> {
  if (filmsPlanned > 0) {
    const films = filmsPlanned === 1 ? 'one planned film is' : `${filmsPlanned} planned films are`
    return { kind: 'films-to-measure', sentence: `${study.name}: ${films} not measured yet.` }
  }
  if (film.kind === 'none') return { kind: 'films-to-print', sentence: `${study.name}: no film is planned or measured yet. Plan the first films.` }
  if (film.kind === 'refused') return { kind: tooFewFilms ? 'films-to-print' : 'film-fit-doubtful', sentence: `${study.name}: ${film.detail}` }
  const serious = film.findings.find(finding => finding.severity === 'serious')
  if (serious !== undefined) return { kind: 'film-fit-doubtful', sentence: `${study.name}: ${serious.sentence}` }
  return { kind: 'decide', sentence: `${study.name}: the film curve is fitted. Decide the exposure for ${study.layerHeightMicrometres} µm layers.` }
}

/** An open study whose printer, resin or pairing is retired: nobody sees it in the grid, so it is said here. */
export function restsOnRetired(study: StudyFacts, what: string): Attention[] {
  if (study.state !== 'open') return []
  return [{
    kind: 'rests-on-retired', studyId: study.id, pairingId: study.pairingId, lotId: study.lotId,
    sentence: `${study.name}: ${what} is retired while this study is open. Restore it, or decide, pause or retire the study.`,
  }]
}
