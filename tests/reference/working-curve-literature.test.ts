import { describe, expect, it } from 'vitest'
import { depthAt, exposureForDepth, exposureForLayer, fitWorkingCurve, printThrough, type FilmReading } from '#shared/film/index.ts'
import { readReference } from '#tests/helpers/reference.ts'
import { twoLineDepth, twoLineGradient } from '../../shared/film/two-line-depth.ts'

function curve(exposures: readonly number[], depths: readonly number[]) {
  const readings: FilmReading[] = exposures.map((exposure, i) => ({ exposure, depthMicrometres: depths[i] ?? Number.NaN, state: 'measured' }))
  const fit = fitWorkingCurve({ readings, exposureKind: 'mJ/cm2' })
  if (fit.kind === 'refused') throw new Error(fit.detail)
  return fit
}
const exact = (dp: number, ec: number) => {
  const exposures = [1.5, 2, 3, 5, 8].map(factor => factor * ec)
  return curve(exposures, exposures.map(e => dp * Math.log(e / ec)))
}

describe('the working-curve equation (Jacobs 1992), Dp 100 µm and Ec 10 mJ/cm²', () => {
  const fit = exact(100, 10)
  it.each([[20, 69.3], [30, 109.9]])('cures at %d mJ/cm² to %d µm', (exposure, depth) => expect(depthAt(fit, exposure).depthMicrometres).toBeCloseTo(depth, 1))
  it('adds Dp ln 2 with each doubling', () => {
    expect(depthAt(fit, 40).depthMicrometres - depthAt(fit, 20).depthMicrometres).toBeCloseTo(100 * Math.LN2, 9)
  })
})

describe('eight films with fixed scatter (computed independently with NumPy/SciPy from the equations)', () => {
  const scatter = [2, -3, 1, 4, -2, -1, 3, -4]
  const exposures = [15, 20, 30, 40, 60, 80, 100, 120]
  const fit = curve(exposures, exposures.map((exposure, i) => 100 * Math.log(exposure / 10) + (scatter[i] ?? 0)))
  it('gives Dp, Ec, scatter and the exposure for 75 µm with their standard errors', () => {
    expect(fit.penetrationDepthMicrometres.value).toBeCloseTo(99.18, 2)
    expect(fit.penetrationDepthMicrometres.standardError).toBeCloseTo(1.535, 3)
    expect(fit.criticalExposure.value).toBeCloseTo(9.874, 3)
    expect(fit.criticalExposure.standardError / fit.criticalExposure.value).toBeCloseTo(0.0263, 4)
    expect(fit.residualStandardDeviation).toBeCloseTo(3.09, 3)
    expect(exposureForDepth(fit, 75).value).toBeCloseTo(21.03, 2)
  })
  it('gives the standard error of R 4.2.2 (lm) for the same depths rounded to 0.01 µm', () => {
    const rounded = curve(exposures, [42.55, 66.31, 110.86, 142.63, 177.18, 206.94, 233.26, 244.49])
    expect(rounded.penetrationDepthMicrometres.standardError).toBeCloseTo(1.53583973804, 9)
  })
  it('knows how strongly ln Ec and Dp hang together', () => {
    const [[interceptVariance, both], [, slopeVariance]] = fit.covariance
    const [a, b] = [fit.interceptMicrometres.value, fit.penetrationDepthMicrometres.value]
    const covariance = -both / b + (a * slopeVariance) / b ** 2
    const logVariance = interceptVariance / b ** 2 - (2 * a * both) / b ** 3 + (a ** 2 * slopeVariance) / b ** 4
    expect(covariance / Math.sqrt(logVariance * slopeVariance)).toBeCloseTo(0.908, 3)
    // Exposure for 75 µm: standard error 0.0164 of its logarithm.
    const x = (75 - a) / b
    expect(Math.sqrt(interceptVariance + 2 * x * both + x * x * slopeVariance) / b).toBeCloseTo(0.0164, 4)
  })
})

describe('systematic errors (computed from the equation)', () => {
  const exposures = [15, 20, 30, 45, 70, 100]
  const depths = exposures.map(e => 100 * Math.log(e / 10))
  it('a gauge that adds 10 µm leaves Dp and divides Ec by exp(0.1)', () => {
    const fit = curve(exposures, depths.map(depth => depth + 10))
    expect(fit.penetrationDepthMicrometres.value).toBeCloseTo(100, 8)
    expect(fit.criticalExposure.value / 10).toBeCloseTo(0.905, 3)
  })
  it('a shrinkage of 5 % takes 5 % from Dp, leaves Ec and asks 4 % more for 75 µm', () => {
    const fit = curve(exposures, depths.map(depth => 0.95 * depth))
    expect(fit.penetrationDepthMicrometres.value).toBeCloseTo(95, 8)
    expect(fit.criticalExposure.value).toBeCloseTo(10, 8)
    expect(exposureForDepth(fit, 75).value / exposureForDepth(exact(100, 10), 75).value).toBeCloseTo(1.04, 3)
  })
})

describe('light of two kinds, half at 50 µm and half at 200 µm (computed from the equation)', () => {
  const parts = { logCritical: 0, shallow: 50, deep: 200, share: 0.5 }
  const coefficients = [0, Math.log(50), Math.log(3), 0]
  it.each([[50, 1.744, 101.9], [100, 2.696, 129.3], [200, 5.179, 175.1]])('reaches %d µm at %d times Ec with the local slope %d µm', (depth, exposure, slope) => {
    expect(twoLineDepth(parts, Math.log(exposure))).toBeCloseTo(depth, -0.5)
    expect(Math.exp(-Math.log(0.5 * Math.exp(-depth / 50) + 0.5 * Math.exp(-depth / 200)))).toBeCloseTo(exposure, 3)
    expect(-(twoLineGradient(coefficients, Math.log(exposure))[0] ?? 0)).toBeCloseTo(slope, 0)
  })
  it('starts with a slope of 80 µm', () => expect(-(twoLineGradient(coefficients, 0)[0] ?? 0)).toBeCloseTo(80, 9))
  it('looks straight from 25 to 150 µm, yet gives a Dp of 119.2 µm and an Ec 13 % high', () => {
    const depths = [25, 50, 75, 100, 150]
    const fit = curve(depths.map(z => 1 / (0.5 * Math.exp(-z / 50) + 0.5 * Math.exp(-z / 200))), depths)
    expect(fit.penetrationDepthMicrometres.value).toBeCloseTo(119.2, 1)
    expect(fit.criticalExposure.value).toBeCloseTo(1.13, 2)
    for (const [i, residual] of [4.5, -1.6, -4.1, -3.5, 4.6].entries()) expect(fit.residuals[i]).toBeCloseTo(residual, 1)
  })
})

describe('layers at Dp 100 µm and layer height 50 µm (computed from the equations)', () => {
  const fit = exact(100, 10)
  it('prints through 59.9 µm with one exposure of three times Ec and 153.1 µm with all', () => {
    const through = printThrough({ fit, exposure: 30, layerHeightMicrometres: 50 })
    expect(through.singleLayerMicrometres).toBeCloseTo(59.9, 1)
    expect(through.limitMicrometres).toBeCloseTo(153.1, 1)
  })
  it.each([
    ['constant-overcure', 25, 0.779], ['constant-overcure', 100, 1.649],
    ['constant-ratio', 25, 0.607], ['constant-ratio', 100, 2.718],
  ] as const)('%s asks at %d µm for %d times the exposure', (rule, layerHeightMicrometres, factor) => {
    const exposureAt = (height: number) => exposureForLayer(fit, {
      layerHeightMicrometres: height,
      rule: rule === 'constant-overcure' ? { kind: rule, overcureMicrometres: 50 } : { kind: rule, ratio: 2 },
    }).value
    expect(exposureAt(layerHeightMicrometres) / exposureAt(50)).toBeCloseTo(factor, 3)
  })
})

describe('published curves (fixtures/reference/workingcurve_published.json names each source)', () => {
  interface Published {
    readonly id: string
    readonly facts: Readonly<Record<string, unknown>> & { readonly slurry_S1?: readonly { readonly Dp_um: number; readonly Ec_mJ_cm2: number }[] }
  }
  const { data, expected } = readReference<readonly Published[], { readonly consistency_checks: readonly { readonly id: string; readonly values_mJ_cm2?: readonly number[] }[] }>('workingcurve_published')
  const slurry = data.find(one => one.id === 'padova2025')?.facts.slurry_S1 ?? []
  const values = (id: string) => expected.consistency_checks.find(check => check.id === id)?.values_mJ_cm2 ?? []

  it.each([[100, 'padova2025_S1_E_for_100um'], [200, 'padova2025_S1_E_for_200um']] as const)(
    'one slurry under three conditions asks for very different exposures for %d µm',
    (depth, id) => {
      expect(slurry).toHaveLength(3)
      const exposures = slurry.map(one => exposureForDepth(exact(one.Dp_um, one.Ec_mJ_cm2), depth).value)
      for (const [i, exposure] of exposures.entries()) expect(exposure / (values(id)[i] ?? Number.NaN)).toBeCloseTo(1, 10)
    },
  )
})
