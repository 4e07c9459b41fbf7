import {
  fitQuadraticCurve, fitRobustWorkingCurve, fitTwoLineAttenuation, fitWorkingCurveYork, modelExposureForDepth, type FilmReading,
} from '#shared/film/index.ts'
import { randomNormal, type RandomSource } from '#shared/stats/index.ts'
import { geometric } from './film-truth.ts'
import { CoverageTally, percent, renderTable, withError, type Coverage } from './tally.ts'

export interface LineCoverage {
  readonly Dp: Coverage
  readonly Ec: Coverage
  readonly refusals: number
}

export interface LineDesign {
  readonly levels: number
  readonly replicates: number
}
export const lineDesigns: readonly LineDesign[] = [{ levels: 6, replicates: 1 }, { levels: 8, replicates: 1 }, { levels: 6, replicates: 3 }]

const [penetrationDepth, criticalExposure] = [100, 10]
const straight = (exposure: number): number => penetrationDepth * Math.log(exposure / criticalExposure)
const exposuresOf = (design: LineDesign): number[] => geometric({ from: 1.5 * criticalExposure, to: 9 * criticalExposure, ...design })

/**
 * York's line with exposures that the meter repeats within 4 % and depths within 5 µm, stated right or too small by half.
 *
 * What a film truly got scatters about what the meter said; the scale error is drawn once for each set.
 */
export function yorkCoverage(options: { readonly design: LineDesign; readonly stated: number; readonly scale: number; readonly sets: number; readonly random: RandomSource }): LineCoverage {
  const { design, stated, scale, sets, random } = options
  const [repeatability, micrometres] = [0.04, 5]
  const tallies = { Dp: new CoverageTally(), Ec: new CoverageTally() }
  let refusals = 0
  for (let set = 0; set < sets; set++) {
    const factor = Math.exp(scale * randomNormal(random))
    const readings = exposuresOf(design).map((exposure): FilmReading => ({
      exposure: factor * exposure * Math.exp(repeatability * randomNormal(random)),
      depthMicrometres: straight(exposure) + micrometres * randomNormal(random),
      state: 'measured',
    }))
    const fit = fitWorkingCurveYork({
      readings, exposureKind: 'mJ/cm2', exposureRelativeUncertainty: stated * repeatability,
      depthStandardUncertaintyMicrometres: stated * micrometres, scaleRelativeUncertainty: scale,
    })
    if (fit.kind === 'refused') {
      refusals += 1
      continue
    }
    tallies.Dp.add(fit.penetrationDepthMicrometres.interval, penetrationDepth)
    tallies.Ec.add(fit.criticalExposure.interval, criticalExposure)
  }
  return { Dp: tallies.Dp.result(), Ec: tallies.Ec.result(), refusals: refusals / sets }
}

/** The robust line; `wild`: the chance that a film is 60 µm off. `differing`: how often both answers are shown. */
export function robustCoverage(options: { readonly design: LineDesign; readonly wild: number; readonly sets: number; readonly random: RandomSource }): LineCoverage & { readonly differing: number } {
  const { design, wild, sets, random } = options
  const tallies = { Dp: new CoverageTally(), Ec: new CoverageTally() }
  let [refusals, differing] = [0, 0]
  for (let set = 0; set < sets; set++) {
    const readings = exposuresOf(design).map((exposure): FilmReading => ({
      exposure, depthMicrometres: straight(exposure) + 5 * randomNormal(random) + (random() < wild ? 60 : 0), state: 'measured',
    }))
    const fit = fitRobustWorkingCurve({ readings, exposureKind: 'mJ/cm2', depthMicrometres: 100 })
    if (fit.kind === 'refused') {
      refusals += 1
      continue
    }
    if (fit.differs) differing += 1
    tallies.Dp.add(fit.penetrationDepthMicrometres.interval, penetrationDepth)
    tallies.Ec.add(fit.criticalExposure.interval, criticalExposure)
  }
  return { Dp: tallies.Dp.result(), Ec: tallies.Ec.result(), refusals: refusals / sets, differing: differing / sets }
}

/** Exposure for 100 µm by the curves that bend, on films of light of two kinds (share given) or of a parabola. */
export function bentCoverage(options: { readonly design: LineDesign; readonly model: 'quadratic' | 'two-line'; readonly sets: number; readonly random: RandomSource }): { readonly answer: Coverage; readonly refusals: number } {
  const { design, model, sets, random } = options
  const tally = new CoverageTally()
  const exposureFor = (z: number): number =>
    model === 'two-line' ? 1 / (0.5 * Math.exp(-z / 50) + 0.5 * Math.exp(-z / 200)) : 10 * Math.exp((-100 + Math.sqrt(1e4 + 40 * z)) / 20)
  const depths = Array.from({ length: design.levels }, (_, i) => 30 + (220 * i) / (design.levels - 1)).flatMap(depth => new Array<number>(design.replicates).fill(depth))
  let refusals = 0
  for (let set = 0; set < sets; set++) {
    const readings = depths.map((depth): FilmReading => ({ exposure: exposureFor(depth), depthMicrometres: depth + 4 * randomNormal(random), state: 'measured' }))
    const fit = model === 'two-line'
      ? fitTwoLineAttenuation({ readings, exposureKind: 'mJ/cm2', shallowShare: 0.5 })
      : fitQuadraticCurve({ readings, exposureKind: 'mJ/cm2' })
    const answer = fit.kind === 'refused' ? fit : modelExposureForDepth(fit, 100)
    if (answer.kind === 'refused') refusals += 1
    else tally.add(answer.meanInterval, exposureFor(100))
  }
  return { answer: tally.result(), refusals: refusals / sets }
}

const cell = (coverage: Coverage): string => `${withError(coverage)} | ${percent(coverage.medianRelativeWidth, 0)}`

/** Tables of `npm run simulate`: coverage | median width. */
export function reportFilmLines(options: { readonly sets: number; readonly random: RandomSource; readonly print: (text: string) => void }): void {
  const { sets, random, print } = options
  const nameOf = (design: LineDesign): string => `${design.levels} exposures of ${design.replicates}`
  print(`\nYork's line, exposures within 4 %, depths within 5 µm, ${sets} sets: coverage | median width`)
  print(renderTable(['design', 'Dp', 'Ec', 'refused'], lineDesigns.flatMap(design =>
    ([[1, 0], [0.5, 0], [2, 0], [1, 0.1]] as const).map(([stated, scale]) => {
      const result = yorkCoverage({ design, stated, scale, sets, random })
      const words = stated === 1 ? 'stated right' : stated < 1 ? 'stated half' : 'stated twice'
      return [`${nameOf(design)}, ${words}${scale > 0 ? ', meter scale 10 %' : ''}`, cell(result.Dp), cell(result.Ec), percent(result.refusals)]
    }))))
  print(`\nRobust line, scatter 5 µm, ${sets} sets: coverage | median width; how often it differs from the straight line`)
  print(renderTable(['design', 'Dp', 'Ec', 'refused', 'differs'], lineDesigns.flatMap(design => [0, 0.1].map(wild => {
    const result = robustCoverage({ design, wild, sets, random })
    return [`${nameOf(design)}${wild > 0 ? ', one film in ten 60 µm off' : ''}`, cell(result.Dp), cell(result.Ec), percent(result.refusals), percent(result.differing)]
  }))))
  const fewer = Math.min(sets, 1000)
  print(`\nCurves that bend, scatter 4 µm, ${fewer} sets: exposure for 100 µm, coverage | median width`)
  print(renderTable(['design', 'exposure', 'refused'], lineDesigns.flatMap(design => (['quadratic', 'two-line'] as const).map(model => {
    const result = bentCoverage({ design, model, sets: fewer, random })
    return [`${model}, ${nameOf(design)}`, cell(result.answer), percent(result.refusals)]
  }))))
}
