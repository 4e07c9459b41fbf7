import { expose } from 'comlink'
import { fitWorkingCurveYork, type WorkingCurveOptions, type YorkWorkingCurveOutcome } from '#shared/film/index.ts'

export interface MeterQuestion {
  readonly inputs: WorkingCurveOptions
  /** Repeatability of the exposures, as a share. */
  readonly exposureShare: number
  /** Uncertainty of the meter's calibration, as a share; common to all films. */
  readonly scaleShare: number
  readonly caliperMicrometres: number
}

/** Fetched only when somebody asks what an uncertain exposure does to the curve. */
export const meterWorker = {
  fit: ({ inputs, exposureShare, scaleShare, caliperMicrometres }: MeterQuestion): YorkWorkingCurveOutcome =>
    fitWorkingCurveYork({
      readings: inputs.readings, exposureKind: inputs.exposureKind, exposureRelativeUncertainty: exposureShare, scaleRelativeUncertainty: scaleShare,
      depthStandardUncertaintyMicrometres: caliperMicrometres, ...(inputs.confidenceLevel === undefined ? {} : { confidenceLevel: inputs.confidenceLevel }),
    }),
}
export type MeterWorker = typeof meterWorker

expose(meterWorker)
