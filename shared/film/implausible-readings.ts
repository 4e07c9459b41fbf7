import { median, medianSlope } from '../stats/median-slope.ts'
import type { FilmReading } from './types.ts'

export interface Implausible {
  readonly index: number
  readonly sentence: string
}

/** Common practice, no published source: single-exposure films are between some µm and about 2 mm thick. */
const thinnestMicrometres = 5
const thickestMicrometres = 2000
/** In robust standard deviations: a faultless film is marked about once in 16,000. */
const robustLimit = 4

/**
 * Readings that are probably slips of typing or of unit: they are kept and marked, never dropped.
 *
 * Beyond plain limits, a reading is compared with the median slope line through all others (Theil-Sen), which a few
 * slips cannot move.
 *
 * @example
 * implausibleReadings([{ exposure: 2, depthMicrometres: 85000, state: 'measured' }])[0]?.sentence
 */
export function implausibleReadings(readings: readonly FilmReading[]): readonly Implausible[] {
  const marked = new Map<number, string>()
  const usable: { index: number; x: number; y: number }[] = []
  for (const [index, reading] of readings.entries()) {
    if (reading.state !== 'measured') continue
    const depth = reading.depthMicrometres
    if (depth < 0) marked.set(index, 'Below zero: is the substrate subtracted twice?')
    else if (depth > thickestMicrometres) marked.set(index, `${Math.round(depth)} µm is thicker than a film can be: was it typed in another unit?`)
    else if (depth < thinnestMicrometres) marked.set(index, `${depth.toPrecision(2)} µm is thinner than a film that holds together: was it typed in another unit, or is there no film?`)
    else usable.push({ index, x: Math.log(reading.exposure), y: depth })
  }
  // The median of all pairwise slopes is quadratic in work; a spread-out sample of 200 says as much.
  const stride = Math.max(1, Math.ceil(usable.length / 200))
  const sample = usable.filter((_, i) => i % stride === 0)
  if (sample.length >= 5) {
    if (sample.some(point => point.x !== sample[0]?.x)) {
      const slope = medianSlope(sample.map(point => point.x), sample.map(point => point.y))
      const intercept = median(sample.map(point => point.y - slope * point.x))
      const distances = usable.map(point => point.y - intercept - slope * point.x)
      // 1.4826 turns the median distance into a standard deviation; 5 µm keeps very even films from raising alarms.
      const scale = Math.max(5, 1.4826 * median(sample.map(point => Math.abs(point.y - intercept - slope * point.x))))
      for (const [i, point] of usable.entries()) {
        const distance = distances[i] ?? 0
        if (Math.abs(distance) > robustLimit * scale) {
          marked.set(point.index, `${Math.round(Math.abs(distance))} µm ${distance > 0 ? 'above' : 'below'} what the other films suggest: a slip, or a film worth a second look?`)
        }
      }
    }
  }
  return [...marked].map(([index, sentence]) => ({ index, sentence })).sort((a, b) => a.index - b.index)
}
