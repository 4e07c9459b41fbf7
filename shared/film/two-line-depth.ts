/** What the two-line solver works with: ln Ec, ln D1, ln(D2/D1 − 1), ln(w/(1 − w)). */
export type TwoLineCoefficients = readonly number[]

export interface TwoLineParts {
  readonly logCritical: number
  readonly shallow: number
  readonly deep: number
  readonly share: number
}

export function twoLineParts([logCritical = 0, logShallow = 0, logGap = 0, logit = 0]: TwoLineCoefficients): TwoLineParts {
  const shallow = Math.exp(logShallow)
  return { logCritical, shallow, deep: shallow * (1 + Math.exp(logGap)), share: 1 / (1 + Math.exp(-logit)) }
}

/** ln of w e^(−z/D1) + (1 − w) e^(−z/D2): by how much the light is weakened at a depth. */
export function logAttenuation({ shallow, deep, share }: TwoLineParts, depth: number): number {
  const [a, b] = [Math.log(share) - depth / shallow, Math.log1p(-share) - depth / deep]
  const top = Math.max(a, b)
  return top + Math.log(Math.exp(a - top) + Math.exp(b - top))
}

/** Shares of the light at a depth that are of the shallow and the deep kind. */
function sharesAt(parts: TwoLineParts, depth: number): readonly [number, number] {
  const odds = Math.exp(Math.log(parts.share) - Math.log1p(-parts.share) + depth / parts.deep - depth / parts.shallow)
  return [odds === Infinity ? 1 : odds / (1 + odds), 1 / (1 + odds)]
}

/**
 * The depth at which ln E has fallen to ln Ec.
 *
 * The logarithm of the weakening is convex in depth, so Newton's steps from a place where light is left over approach
 * from one side and never overshoot.
 */
export function twoLineDepth(parts: TwoLineParts, logExposure: number): number {
  const surplus = logExposure - parts.logCritical
  let depth = surplus * (surplus >= 0 ? parts.shallow : parts.deep)
  for (let step = 0; step < 200; step++) {
    const left = logAttenuation(parts, depth) + surplus
    const [a, b] = sharesAt(parts, depth)
    const move = left / (a / parts.shallow + b / parts.deep)
    depth += move
    if (!(Math.abs(move) > 1e-14 * (Math.abs(depth) + parts.shallow))) break
  }
  return depth
}

/** Derivatives of the depth by the four coefficients, from the implicit equation. */
export function twoLineGradient(coefficients: TwoLineCoefficients, logExposure: number): number[] {
  const parts = twoLineParts(coefficients)
  const depth = twoLineDepth(parts, logExposure)
  const [a, b] = sharesAt(parts, depth)
  const local = 1 / (a / parts.shallow + b / parts.deep)
  const { shallow, deep, share } = parts
  const gap = deep - shallow
  // d ln(weakening) by ln D1 (with D2 in proportion), by ln gap, and by the logit of the share.
  const byShallow = (a * depth) / shallow + (b * depth) / deep
  const byGap = (b * depth * gap) / deep ** 2
  const byLogit = a * (1 - share) - b * share
  return [-local, local * byShallow, local * byGap, local * byLogit]
}
