import type { RandomSource } from '#shared/stats/index.ts'
import {
  falseAlarms,
  filmCoverage,
  filmDesigns,
  filmQuantities,
  oddFilm,
  planCoverage,
  planDesigns,
  repeatedReadingCoverage,
} from './film-coverage.ts'
import { potencyCoverage, transferCases, transferCoverage } from './film-transfer.ts'
import type { Scatter } from './film-truth.ts'
import { percent, renderTable, withError } from './tally.ts'

const additive: Scatter = { kind: 'additive', micrometres: 20 }
const proportional: Scatter = { kind: 'proportional', share: 0.05 }

/** Every interval of the film part, as tables; `print` gets one finished table after another. */
export function reportFilm(options: {
  readonly sets: number
  readonly random: RandomSource
  readonly print: (text: string) => void
}): void {
  const { sets, random, print } = options
  for (const [title, scatter, weighting] of [
    ['additive scatter of 20 µm, equal weights', additive, 'equal'],
    ['scatter of 5 % of the depth, equal weights', proportional, 'equal'],
    ['scatter of 5 % of the depth, proportional weights', proportional, 'proportional'],
    ['additive scatter of 20 µm, proportional weights (wrong on purpose)', additive, 'proportional'],
  ] as const) {
    const rows = filmDesigns.map(design => {
      const result = filmCoverage({ design, scatter, weighting, sets, random })
      return [
        `${design.levels} exposures × ${design.replicates}`,
        ...filmQuantities.map(
          quantity => `${withError(result[quantity])} w ${percent(result[quantity].medianRelativeWidth, 0)}`,
        ),
        percent(result['E(100 µm)'].notFinite),
      ]
    })
    print(`\nWorking curve, ${title}: coverage of 95 % intervals ± Monte Carlo error, median relative width`)
    print(renderTable(['design', ...filmQuantities, 'no two ends'], rows))
  }

  print('\nThree readings of each of six films (15 µm between films, 10 µm between readings)')
  print(
    renderTable(
      ['readings are', 'Dp', 'E(200 µm)'],
      [true, false].map(averaged => {
        const result = repeatedReadingCoverage({ averaged, sets, random })
        return [
          averaged ? 'averaged first (the rule)' : 'taken for films (the mistake)',
          withError(result.Dp),
          withError(result['E(200 µm)']),
        ]
      }),
    ),
  )

  print('\nFindings on faultless films: share of data sets on which each speaks up')
  const codes = ['lack-of-fit', 'curvature', 'outlier', 'influence', 'spread-grows', 'any', 'any serious']
  print(
    renderTable(
      ['design', ...codes],
      [
        [4, 1],
        [6, 1],
        [8, 1],
        [6, 2],
        [8, 3],
      ].map(([levels = 0, replicates = 0]) => {
        const shares = falseAlarms({ design: { levels, replicates }, scatter: additive, sets, random })
        return [`${levels} exposures × ${replicates}`, ...codes.map(code => percent(shares.get(code) ?? 0))]
      }),
    ),
  )

  print(
    '\nSix films for a target of 120 µm, as multiples of its exposure; then the same on a curve that bends by 6 %',
  )
  print(
    renderTable(
      ['exposures', 'E(120 µm)', 'width', 'Dp', 'width', 'bent: E(120 µm)', 'bent: Dp', 'bend named'],
      planDesigns.map(([name, exposures]) => {
        const { target, slope, bentTarget, bentSlope, bendNamed } = planCoverage({ exposures, sets, random })
        return [
          name,
          withError(target),
          percent(target.medianRelativeWidth, 0),
          withError(slope),
          percent(slope.medianRelativeWidth, 0),
          withError(bentTarget),
          withError(bentSlope),
          percent(bendNamed),
        ]
      }),
    ),
  )

  print('\nOne film 120 µm off and kept: coverage of E(200 µm), and how often it is named')
  print(
    renderTable(
      ['films', 'coverage', 'width', 'named'],
      [5, 6, 8].map(levels => {
        const { kept, named } = oddFilm({ levels, sets, random })
        return [String(levels), withError(kept), percent(kept.medianRelativeWidth, 0), percent(named, 0)]
      }),
    ),
  )

  print('\nA proven exposure of 1.7 s (step 0.1 s) carried to another layer height')
  print(
    renderTable(
      ['Dp, height, films, rule', 'coverage', 'width', 'no two ends', 'says a print must decide'],
      transferCases.map(which => {
        const result = transferCoverage({ case: which, sets, random })
        return [
          `${which.penetrationDepthMicrometres} µm, ${which.provenLayerHeightMicrometres} to ${which.layerHeightMicrometres} µm, ${which.films}, ${which.rule}`,
          withError(result),
          percent(result.medianRelativeWidth, 0),
          percent(result.notFinite),
          percent(result.printMustDecide, 0),
        ]
      }),
    ),
  )

  print('\nTwo printers, five exposures twice each: potency ratio at 200 µm')
  const noises: [string, Scatter][] = [
    ['10 µm', { kind: 'additive', micrometres: 10 }],
    ['20 µm', additive],
    ['30 µm', { kind: 'additive', micrometres: 30 }],
    ['5 %', proportional],
  ]
  print(
    renderTable(
      ['scatter, ratio of Dp', 'separate lines', 'width', 'pooled offered', 'pooled, where offered'],
      noises.flatMap(([name, scatter]) =>
        [1, 1.1, 1.2, 1.4].map(slopeRatio => {
          const { separate, pooled, offered } = potencyCoverage({ scatter, slopeRatio, sets, random })
          return [
            `${name}, ${slopeRatio}`,
            withError(separate),
            percent(separate.medianRelativeWidth, 0),
            percent(offered, 0),
            offered === 0 ? '' : withError(pooled),
          ]
        }),
      ),
    ),
  )
}
