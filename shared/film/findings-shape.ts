import { fUpperTail } from '../stats/quantiles.ts'
import { formatExposure } from '../format.ts'
import type { Finding, FindingSeverity, WorkingCurveFit } from './types.ts'

/** From here a check is worth a look; five checks at 5 % speak up on a quarter of faultless sets, so `serious` needs 1 %. */
const cautionLevel = 0.05
const seriousLevel = 0.01

const severityOf = (pValue: number): FindingSeverity => (pValue < seriousLevel ? 'serious' : 'caution')

/** Does the straight line follow the films: replicate error against misfit, and a bend. */
export function shapeFindings(fit: WorkingCurveFit): Finding[] {
  const findings: Finding[] = []
  const { curvature, lackOfFit } = fit.checks
  if (lackOfFit !== null && lackOfFit.pureErrorSumOfSquares === 0 && lackOfFit.lackOfFitSumOfSquares > 0) {
    findings.push({
      code: 'replicates-identical', severity: 'caution',
      sentence: 'Films of one exposure read exactly alike: the gauge is too coarse to show their scatter, or one film was entered twice. Lack of fit cannot be judged.',
      numbers: { pureErrorDegreesOfFreedom: lackOfFit.pureErrorDegreesOfFreedom },
    })
  } else if (lackOfFit !== null && lackOfFit.pValue < cautionLevel) {
    findings.push({
      code: 'lack-of-fit', severity: severityOf(lackOfFit.pValue),
      sentence: 'The films stray from the straight line by more than films of one exposure stray from each other. Look for a bend, a swapped row or a film read twice.',
      numbers: {
        f: lackOfFit.f,
        numeratorDegreesOfFreedom: lackOfFit.lackOfFitDegreesOfFreedom,
        denominatorDegreesOfFreedom: lackOfFit.pureErrorDegreesOfFreedom,
        pValue: lackOfFit.pValue,
      },
      formula: 'F = (lack-of-fit sum of squares / df) / (pure-error sum of squares / df)',
      source: 'NIST/SEMATECH e-Handbook of Statistical Methods, 4.4.4.6',
    })
  }
  if (curvature !== null && curvature.pValue < cautionLevel) {
    const flattens = curvature.coefficient < 0
    // The line's exposure for a thin depth, over that of the bent curve.
    const error = Math.expm1(curvature.thinEndMicrometres / fit.penetrationDepthMicrometres.value)
    const percent = Math.round(100 * Math.abs(error))
    const effect = percent < 1 ? 'hardly changes' : `comes out about ${percent} % too ${error > 0 ? 'high' : 'low'}`
    findings.push({
      code: 'curvature', severity: severityOf(curvature.pValue),
      sentence: `The film curve bends: above ${formatExposure(Math.exp(curvature.turnLogExposure), fit.exposureKind)} it ${flattens ? 'flattens' : 'steepens'}. Read from the straight line, the exposure for the thinnest film ${effect}, and Dp holds only for the measured range. Keep films near the target depth, or compare the other curves.`,
      numbers: {
        quadraticMicrometres: curvature.coefficient,
        standardError: curvature.standardError,
        t: curvature.t,
        degreesOfFreedom: curvature.degreesOfFreedom,
        pValue: curvature.pValue,
        f: curvature.t ** 2,
        fPValue: fUpperTail(curvature.t ** 2, 1, curvature.degreesOfFreedom),
        thinEndMicrometres: curvature.thinEndMicrometres,
        thickEndMicrometres: curvature.thickEndMicrometres,
        exposureErrorAtThinnestPercent: 100 * error,
      },
      formula: 'depth = a + b ln E + c (ln E)²; t = c / standard error of c',
      source: 'Draper & Smith, Applied Regression Analysis (extra sum of squares)',
    })
  }
  return findings
}
