import type { FilmReading } from '#shared/film/index.ts'

/** Measured readings from two columns. */
export function measured(exposures: readonly number[], depths: readonly number[]): FilmReading[] {
  return exposures.map((exposure, i) => ({ exposure, depthMicrometres: depths[i] ?? Number.NaN, state: 'measured' }))
}

/** Scatter of a good caliper, fixed, so that every run sees the same films. */
export const scatterMicrometres = [1.1, -2.2, 1.6, -0.9, 0.4, 1.3, -1.7, 0.6, -0.3, 0.8]

/** The fitted branch of an outcome, or a failed test with the refusal's own words. */
export function fittedOnly<O extends { readonly kind: string }>(outcome: O): Extract<O, { readonly kind: 'fitted' }> {
  if (isFitted(outcome)) return outcome
  throw new Error(`not fitted: ${JSON.stringify(outcome)}`)
}

function isFitted<O extends { readonly kind: string }>(outcome: O): outcome is Extract<O, { readonly kind: 'fitted' }> {
  return outcome.kind === 'fitted'
}
