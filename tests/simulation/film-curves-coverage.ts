import {
  censoredExposureForDepth, exposureForDepth, fitCensoredWorkingCurve, fitDeadTimeCurve, fitWorkingCurve, modelExposureForDepth, type FilmReading,
} from '#shared/film/index.ts'
import { randomNormal, type RandomSource } from '#shared/stats/index.ts'
import { geometric } from './film-truth.ts'
import { CoverageTally, percent, renderTable, withError, type Coverage } from './tally.ts'

export const censoredQuantities = ['Dp', 'Ec', 'E(50 µm)', 'E(100 µm)'] as const
export type CensoredCoverage = Readonly<Record<(typeof censoredQuantities)[number], Coverage>> & { readonly refusals: number; readonly missing: number }

export interface CensoredDesign {
  readonly levels: number
  readonly replicates: number
  readonly micrometres: number
}

/** From 0.9 to 6 times the critical exposure: one or two levels give films too thin to hold. */
export const censoredDesigns: readonly CensoredDesign[] = [
  { levels: 6, replicates: 1, micrometres: 5 }, { levels: 8, replicates: 1, micrometres: 5 }, { levels: 8, replicates: 1, micrometres: 12 },
  { levels: 6, replicates: 2, micrometres: 5 }, { levels: 6, replicates: 3, micrometres: 12 },
]

const truth = { penetrationDepth: 100, criticalExposure: 10, limit: 20 }

/**
 * Films of the straight line, those below the limit lost. `censored`: by maximum likelihood; `dropped`: the straight
 * line through the films that are there, as if nothing else had been tried.
 */
export function censoredCoverage(options: {
  readonly design: CensoredDesign
  readonly fit: 'censored' | 'dropped'
  readonly sets: number
  readonly random: RandomSource
}): CensoredCoverage {
  const { design, sets, random } = options
  const { penetrationDepth, criticalExposure, limit } = truth
  const tallies = { Dp: new CoverageTally(), Ec: new CoverageTally(), 'E(50 µm)': new CoverageTally(), 'E(100 µm)': new CoverageTally() }
  const exposures = geometric({ from: 0.9 * criticalExposure, to: 6 * criticalExposure, ...design })
  let refusals = 0
  let missing = 0
  for (let set = 0; set < sets; set++) {
    const readings = exposures.map((exposure): FilmReading => {
      const depthMicrometres = penetrationDepth * Math.log(exposure / criticalExposure) + design.micrometres * randomNormal(random)
      return { exposure, depthMicrometres, state: depthMicrometres < limit ? 'no-film' : 'measured' }
    })
    missing += readings.filter(reading => reading.state === 'no-film').length
    const fit = options.fit === 'censored'
      ? fitCensoredWorkingCurve({ readings, exposureKind: 'mJ/cm2', limitMicrometres: limit })
      : fitWorkingCurve({ readings, exposureKind: 'mJ/cm2' })
    if (fit.kind === 'refused') {
      refusals += 1
      continue
    }
    tallies.Dp.add(fit.penetrationDepthMicrometres.interval, penetrationDepth)
    tallies.Ec.add(fit.criticalExposure.interval, criticalExposure)
    for (const depth of [50, 100] as const) {
      const answer = 'limitMicrometres' in fit ? censoredExposureForDepth(fit, depth) : exposureForDepth(fit, depth)
      tallies[`E(${depth} µm)`].add(answer.meanInterval, criticalExposure * Math.exp(depth / penetrationDepth))
    }
  }
  return {
    Dp: tallies.Dp.result(), Ec: tallies.Ec.result(), 'E(50 µm)': tallies['E(50 µm)'].result(), 'E(100 µm)': tallies['E(100 µm)'].result(),
    refusals: refusals / sets, missing: missing / sets,
  }
}

export const deadTimeQuantities = ['t0', 'Dp', 'tc', 't(100 µm)'] as const
export type DeadTimeCoverage = Readonly<Record<(typeof deadTimeQuantities)[number], Coverage>> & { readonly refusals: number }

export interface DeadTimeDesign {
  readonly levels: number
  readonly replicates: number
  readonly micrometres: number
}
export const deadTimeDesigns: readonly DeadTimeDesign[] = [
  { levels: 6, replicates: 1, micrometres: 3 }, { levels: 8, replicates: 1, micrometres: 3 }, { levels: 8, replicates: 1, micrometres: 8 }, { levels: 6, replicates: 2, micrometres: 5 },
]

/** Exposures of 1 to 10 s with a source that comes up 0.5 s late. */
export function deadTimeCoverage(options: { readonly design: DeadTimeDesign; readonly sets: number; readonly random: RandomSource }): DeadTimeCoverage {
  const { design, sets, random } = options
  const [deadTime, penetrationDepth, criticalTime] = [0.5, 100, 0.3]
  const tallies = { t0: new CoverageTally(), Dp: new CoverageTally(), tc: new CoverageTally(), 't(100 µm)': new CoverageTally() }
  const exposures = geometric({ from: 1, to: 10, ...design })
  let refusals = 0
  for (let set = 0; set < sets; set++) {
    const readings = exposures.map((exposure): FilmReading => ({
      exposure,
      depthMicrometres: penetrationDepth * Math.log((exposure - deadTime) / criticalTime) + design.micrometres * randomNormal(random),
      state: 'measured',
    }))
    const fit = fitDeadTimeCurve({ readings, exposureKind: 'seconds' })
    if (fit.kind === 'refused') {
      refusals += 1
      continue
    }
    tallies.t0.add(fit.deadTime.interval, deadTime)
    tallies.Dp.add(fit.penetrationDepthMicrometres.interval, penetrationDepth)
    tallies.tc.add(fit.criticalExposure.interval, criticalTime)
    const answer = modelExposureForDepth(fit, 100)
    if (answer.kind === 'answered') tallies['t(100 µm)'].add(answer.meanInterval, deadTime + criticalTime * Math.exp(100 / penetrationDepth))
  }
  return { t0: tallies.t0.result(), Dp: tallies.Dp.result(), tc: tallies.tc.result(), 't(100 µm)': tallies['t(100 µm)'].result(), refusals: refusals / sets }
}

const cell = (coverage: Coverage): string => `${withError(coverage)} | ${percent(coverage.medianRelativeWidth, 0)}${coverage.notFinite > 0.001 ? ` | open ${percent(coverage.notFinite)}` : ''}`

/** Tables of `npm run simulate`: coverage | median width | share without two ends. */
export function reportFilmCurves(options: { readonly sets: number; readonly random: RandomSource; readonly print: (text: string) => void }): void {
  const { random, print } = options
  // Likelihood profiles cost a hundred times a straight line.
  const sets = Math.min(options.sets, 1000)
  print(`\nFilms that did not form, limit 20 µm (Tobit, profile intervals), ${sets} sets: coverage | median width`)
  const rows = censoredDesigns.flatMap(design => (['censored', 'dropped'] as const).map(fit => {
    const result = censoredCoverage({ design, fit, sets, random })
    return [
      `${design.levels} exposures of ${design.replicates}, scatter ${design.micrometres} µm, missing films ${fit === 'censored' ? 'used' : 'dropped'}`,
      ...censoredQuantities.map(quantity => cell(result[quantity])), result.missing.toFixed(1), percent(result.refusals),
    ]
  }))
  print(renderTable(['design', ...censoredQuantities, 'missing', 'refused'], rows))
  print(`\nDead time (profile intervals), ${sets} sets: coverage | median width`)
  const others = deadTimeDesigns.map(design => {
    const result = deadTimeCoverage({ design, sets, random })
    return [`${design.levels} exposures of ${design.replicates}, scatter ${design.micrometres} µm`, ...deadTimeQuantities.map(quantity => cell(result[quantity])), percent(result.refusals)]
  })
  print(renderTable(['design', ...deadTimeQuantities, 'refused'], others))
}
