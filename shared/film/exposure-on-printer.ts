/** What a printer can do, in the unit of the exposures; null where only an irradiance could tell. */
export interface PrinterLimits {
  readonly step: number | null
  readonly min: number | null
  readonly max: number | null
}

export interface ExposureOnPrinter {
  /** Nearest step inside the printer's range; null without a step. */
  readonly step: number | null
  readonly beyondPrinter: 'below' | 'above' | null
}

/**
 * Rounds an exposure to the printer's step, inside what the printer can do.
 *
 * @example
 * exposureOnPrinter(1.734, { step: 0.1, min: 0.5, max: 60 }) // { step: 1.7, beyondPrinter: null }
 */
export function exposureOnPrinter(value: number, printer: PrinterLimits): ExposureOnPrinter {
  const beyondPrinter = printer.min !== null && value < printer.min ? 'below' : printer.max !== null && value > printer.max ? 'above' : null
  if (printer.step === null) return { step: null, beyondPrinter }
  const inside = Math.min(printer.max ?? Infinity, Math.max(printer.min ?? 0, value))
  return { step: Number((Math.max(1, Math.round(inside / printer.step)) * printer.step).toPrecision(12)), beyondPrinter }
}
