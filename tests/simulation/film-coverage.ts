import {
  depthAt,
  exposureForDepth,
  exposureForLayer,
  fitWorkingCurve,
  planFilmExposures,
  type FilmReading,
  type FilmWeighting,
} from '#shared/film/index.ts'
import { randomNormal, type RandomSource } from '#shared/stats/index.ts'
import {
  films,
  geometric,
  scattered,
  trueDepth,
  trueExposure,
  type FilmTruth,
  type Scatter,
} from './film-truth.ts'
import { CoverageTally, type Coverage } from './tally.ts'

/** The intervals of the film curve that a person is shown. */
export const filmQuantities = [
  'Dp',
  'Ec',
  'E(100 µm)',
  'E(200 µm)',
  'far-side rule',
  'one film at 200 µm',
  'depth of one new film',
] as const
export type FilmQuantity = (typeof filmQuantities)[number]

export interface FilmDesign {
  readonly levels: number
  readonly replicates: number
}

/** Twelve designs: 4, 5, 6 or 8 exposures with 1, 2 or 3 films each, all over a factor of 8. */
export const filmDesigns: readonly FilmDesign[] = [4, 5, 6, 8].flatMap(levels =>
  [1, 2, 3].map(replicates => ({ levels, replicates })),
)

const curve = { penetrationDepthMicrometres: 150, criticalExposure: 5 }

/**
 * Coverage and width of the film intervals for one design and one kind of scatter.
 *
 * @param options.sets - simulated data sets
 */
export function filmCoverage(options: {
  readonly design: FilmDesign
  readonly scatter: Scatter
  readonly weighting?: FilmWeighting
  readonly sets: number
  readonly random: RandomSource
}): Readonly<Record<FilmQuantity, Coverage>> {
  const { design, scatter, weighting = 'equal', sets, random } = options
  const truth: FilmTruth = { ...curve, scatter }
  // Depths from 100 to 412 µm.
  const from = trueExposure(truth, 100)
  const exposures = geometric({ from, to: 8 * from, ...design })
  const tallies = newTallies()
  const middle = Math.sqrt(8) * from
  for (let set = 0; set < sets; set++) {
    const fit = fitWorkingCurve({
      readings: films(truth, exposures, random),
      exposureKind: 'mJ/cm2',
      weighting,
    })
    if (fit.kind !== 'fitted') {
      for (const tally of Object.values(tallies)) tally.addRefusal()
      continue
    }
    tallies.Dp.add(fit.penetrationDepthMicrometres.interval, truth.penetrationDepthMicrometres)
    tallies.Ec.add(fit.criticalExposure.interval, truth.criticalExposure)
    for (const depth of [100, 200] as const) {
      tallies[`E(${depth} µm)`].add(exposureForDepth(fit, depth).meanInterval, trueExposure(truth, depth))
    }
    const rule = { kind: 'far-side-dose', doseRatio: 4 } as const
    tallies['far-side rule'].add(
      exposureForLayer(fit, { layerHeightMicrometres: 50, rule }).meanInterval,
      4 * truth.criticalExposure * Math.expm1(50 / truth.penetrationDepthMicrometres),
    )
    // One new film of unknown exposure, measured as it comes: does the interval hold the exposure it had?
    const measured = scattered(truth, 200, random)
    tallies['one film at 200 µm'].add(
      exposureForDepth(fit, measured).singleInterval,
      trueExposure(truth, 200),
    )
    tallies['depth of one new film'].add(
      depthAt(fit, middle).predictionInterval,
      scattered(truth, trueDepth(truth, middle), random),
    )
  }
  return results(tallies)
}

/**
 * Three readings of each film: averaged as films (the rule), or taken for films of their own (the mistake).
 */
export function repeatedReadingCoverage(options: {
  readonly averaged: boolean
  readonly sets: number
  readonly random: RandomSource
}): Readonly<Record<'Dp' | 'E(200 µm)', Coverage>> {
  const truth: FilmTruth = { ...curve, scatter: { kind: 'additive', micrometres: 15 } }
  const from = trueExposure(truth, 100)
  const exposures = geometric({ from, to: 8 * from, levels: 6, replicates: 1 })
  const tallies = { Dp: new CoverageTally(), 'E(200 µm)': new CoverageTally() }
  for (let set = 0; set < options.sets; set++) {
    const readings: FilmReading[] = films(truth, exposures, options.random).flatMap((film, i) =>
      [0, 1, 2].map(() => ({
        ...film,
        depthMicrometres: film.depthMicrometres + 10 * randomNormal(options.random),
        ...(options.averaged ? { filmId: `film ${i}` } : {}),
      })),
    )
    const fit = fitWorkingCurve({ readings, exposureKind: 'mJ/cm2' })
    if (fit.kind !== 'fitted') continue
    tallies.Dp.add(fit.penetrationDepthMicrometres.interval, truth.penetrationDepthMicrometres)
    tallies['E(200 µm)'].add(exposureForDepth(fit, 200).meanInterval, trueExposure(truth, 200))
  }
  return { Dp: tallies.Dp.result(), 'E(200 µm)': tallies['E(200 µm)'].result() }
}

/** Share of faultless data sets on which each finding speaks up, by code and severity. */
export function falseAlarms(options: {
  readonly design: FilmDesign
  readonly scatter: Scatter
  readonly sets: number
  readonly random: RandomSource
}): ReadonlyMap<string, number> {
  const truth: FilmTruth = { ...curve, scatter: options.scatter }
  const from = trueExposure(truth, 100)
  const exposures = geometric({ from, to: 8 * from, ...options.design })
  const counts = new Map<string, number>()
  const judged = new Set([
    'lack-of-fit',
    'curvature',
    'outlier',
    'influence',
    'spread-grows',
    'slope-not-established',
  ])
  for (let set = 0; set < options.sets; set++) {
    const fit = fitWorkingCurve({ readings: films(truth, exposures, options.random), exposureKind: 'mJ/cm2' })
    if (fit.kind !== 'fitted') continue
    const spoken = fit.findings.filter(finding => judged.has(finding.code))
    for (const finding of spoken) counts.set(finding.code, (counts.get(finding.code) ?? 0) + 1)
    if (spoken.some(finding => finding.severity === 'serious'))
      counts.set('any serious', (counts.get('any serious') ?? 0) + 1)
    if (spoken.length > 0) counts.set('any', (counts.get('any') ?? 0) + 1)
  }
  return new Map([...counts].map(([code, count]) => [code, count / options.sets]))
}

/** One film 120 µm off: coverage with it kept, and how often it is named. */
export function oddFilm(options: {
  readonly levels: number
  readonly sets: number
  readonly random: RandomSource
}): {
  readonly kept: Coverage
  readonly named: number
} {
  const truth: FilmTruth = { ...curve, scatter: { kind: 'additive', micrometres: 20 } }
  const from = trueExposure(truth, 100)
  const exposures = geometric({ from, to: 8 * from, levels: options.levels, replicates: 1 })
  const kept = new CoverageTally()
  let named = 0
  for (let set = 0; set < options.sets; set++) {
    const odd = Math.floor(options.random() * exposures.length)
    const side = options.random() < 0.5 ? -120 : 120
    const readings = films(truth, exposures, options.random).map((film, i) =>
      i === odd ? { ...film, depthMicrometres: Math.max(1, film.depthMicrometres + side) } : film,
    )
    const fit = fitWorkingCurve({ readings, exposureKind: 'mJ/cm2' })
    if (fit.kind !== 'fitted') continue
    kept.add(exposureForDepth(fit, 200).meanInterval, trueExposure(truth, 200))
    if (
      fit.findings.some(
        finding => finding.code === 'outlier' && finding.readingIndexes?.includes(odd) === true,
      )
    )
      named += 1
  }
  return { kept: kept.result(), named: named / options.sets }
}

/** Exposures as multiples of that of the target depth, by name. */
export const planDesigns: readonly (readonly [
  string,
  (random: RandomSource, exposure: number) => readonly number[],
])[] = [
  [
    'the plan: 0.8, 0.8, 1, 1.4, 2.5, 4',
    (random, exposure) =>
      planFilmExposures({ expectedExposureAtTarget: exposure, films: 6, stepSeconds: 0.01, random })
        .exposures,
  ],
  [
    'geometric 0.8 to 2',
    (_, exposure) => geometric({ from: 0.8 * exposure, to: 2 * exposure, levels: 6, replicates: 1 }),
  ],
  [
    'geometric 1 to 4',
    (_, exposure) => geometric({ from: exposure, to: 4 * exposure, levels: 6, replicates: 1 }),
  ],
  [
    'geometric 1 to 8',
    (_, exposure) => geometric({ from: exposure, to: 8 * exposure, levels: 6, replicates: 1 }),
  ],
  [
    'geometric 2 to 8 (outside the target)',
    (_, exposure) => geometric({ from: 2 * exposure, to: 8 * exposure, levels: 6, replicates: 1 }),
  ],
  [
    'three at 1, three at 8',
    (_, exposure) => geometric({ from: exposure, to: 8 * exposure, levels: 2, replicates: 3 }),
  ],
]

/** Six films for a target of 120 µm on a straight curve and on one that loses 6 % beyond 1.2 ln units past Ec. */
export function planCoverage(options: {
  readonly exposures: (random: RandomSource, exposure: number) => readonly number[]
  readonly sets: number
  readonly random: RandomSource
}): {
  readonly target: Coverage
  readonly slope: Coverage
  readonly bentTarget: Coverage
  readonly bentSlope: Coverage
  /** Share of the bent sets on which the curvature finding speaks up. */
  readonly bendNamed: number
} {
  const straight: FilmTruth = { ...curve, scatter: { kind: 'additive', micrometres: 20 } }
  const bent: FilmTruth = { ...straight, bend: { fromLogUnits: 1.2, share: 0.06 } }
  const tallies = {
    target: new CoverageTally(),
    slope: new CoverageTally(),
    bentTarget: new CoverageTally(),
    bentSlope: new CoverageTally(),
  }
  let named = 0
  for (let set = 0; set < options.sets; set++) {
    for (const truth of [straight, bent]) {
      const exposure = trueExposure(truth, 120)
      const readings = films(truth, options.exposures(options.random, exposure), options.random)
      const fit = fitWorkingCurve({ readings, exposureKind: 'seconds' })
      if (fit.kind !== 'fitted') continue
      const isBent = truth === bent
      tallies[isBent ? 'bentTarget' : 'target'].add(exposureForDepth(fit, 120).meanInterval, exposure)
      tallies[isBent ? 'bentSlope' : 'slope'].add(
        fit.penetrationDepthMicrometres.interval,
        truth.penetrationDepthMicrometres,
      )
      if (isBent && fit.findings.some(finding => finding.code === 'curvature')) named += 1
    }
  }
  return {
    target: tallies.target.result(),
    slope: tallies.slope.result(),
    bentTarget: tallies.bentTarget.result(),
    bentSlope: tallies.bentSlope.result(),
    bendNamed: named / options.sets,
  }
}

function newTallies(): Record<FilmQuantity, CoverageTally> {
  return {
    Dp: new CoverageTally(),
    Ec: new CoverageTally(),
    'E(100 µm)': new CoverageTally(),
    'E(200 µm)': new CoverageTally(),
    'far-side rule': new CoverageTally(),
    'one film at 200 µm': new CoverageTally(),
    'depth of one new film': new CoverageTally(),
  }
}

function results(tallies: Record<FilmQuantity, CoverageTally>): Record<FilmQuantity, Coverage> {
  return {
    Dp: tallies.Dp.result(),
    Ec: tallies.Ec.result(),
    'E(100 µm)': tallies['E(100 µm)'].result(),
    'E(200 µm)': tallies['E(200 µm)'].result(),
    'far-side rule': tallies['far-side rule'].result(),
    'one film at 200 µm': tallies['one film at 200 µm'].result(),
    'depth of one new film': tallies['depth of one new film'].result(),
  }
}
