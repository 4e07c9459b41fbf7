import { randomNormal, seededRandom, type RandomSource } from '#shared/stats/index.ts'
import { detailLimit, gradedEdge, type FeatureKind, type Tally } from '#shared/window/index.ts'

const sizes = [60, 80, 100, 130, 170]
const reference = 100

/** Graded tiers: one edge that moves with size, as blur makes it; coverage at a printed size and of the finest detail. */
export function gradedCoverage(options: { readonly prints: number; readonly spread: number; readonly sets: number; readonly random: RandomSource }) {
  const { prints, spread, sets, random } = options
  const slope = 34
  let edgeCovered = 0
  let limitCovered = 0
  let effective = 0
  for (let set = 0; set < sets; set++) {
    const truth = {
      'must-form': { edge: Math.log(1.7) + 0.05 * randomNormal(random), sizeSlope: -0.9 + 0.2 * randomNormal(random) },
      'must-stay-open': { edge: Math.log(2.0) + 0.05 * randomNormal(random), sizeSlope: 1.1 + 0.2 * randomNormal(random) },
    }
    const kinds: readonly FeatureKind[] = ['must-form', 'must-stay-open']
    const [form, open] = kinds.map(kind => {
      const { edge, sizeSlope } = truth[kind]
      const tallies: Tally[] = []
      for (let p = 0; p < prints; p++) {
        const exposure = 1.55 + 0.2 * p
        const own = spread * randomNormal(random)
        for (const size of sizes) {
          const eta = (kind === 'must-form' ? 1 : -1) * slope * (Math.log(exposure) - edge - sizeSlope * Math.log(size / reference)) + own
          let passed = 0
          for (let i = 0; i < 5; i++) if (random() < 1 / (1 + Math.exp(-eta))) passed++
          tallies.push({ exposure, sizeMicrometres: size, passed, total: 5, printId: String(p) })
        }
      }
      return gradedEdge({ tallies, kind, prior: { guess: kind === 'must-form' ? 1.7 : 2.0 }, random: seededRandom(set + 1) })
    })
    if (form === undefined || open === undefined) continue
    effective += form.effectiveShare / sets
    const [lower = 0, upper = 0] = form.atSize(100).quantiles(0.5, [0.025, 0.975])
    const right = Math.exp(truth['must-form'].edge)
    if (right >= lower && right <= upper) edgeCovered++
    const limit = detailLimit({ mustForm: form, mustStayOpen: open, target: { shareMustForm: 0.9, shareMustStayOpen: 0.9 } })
    const shift = Math.log(9) / slope
    const gap = truth['must-stay-open'].edge - shift - truth['must-form'].edge - shift
    const rightSize = reference * Math.exp(-gap / (truth['must-stay-open'].sizeSlope - truth['must-form'].sizeSlope))
    if (limit.kind === 'found' && rightSize >= limit.interval.lower && rightSize <= limit.interval.upper) limitCovered++
  }
  return { edge: edgeCovered / sets, detailLimit: limitCovered / sets, effectiveShare: effective }
}
