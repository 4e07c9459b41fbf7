import type { NonlinearJacobian, NonlinearModel } from '#shared/stats/index.ts'

/** The curves of the certified nonlinear sets, by the name of the set, as printed in their files. */
const saturation: NonlinearModel = ([b1 = 0, b2 = 0]) => x => b1 * (1 - Math.exp(-b2 * x))
const saturationJacobian: NonlinearJacobian = ([b1 = 0, b2 = 0]) => x => [1 - Math.exp(-b2 * x), b1 * x * Math.exp(-b2 * x)]
const decay: NonlinearModel = ([b1 = 0, b2 = 0, b3 = 0]) => x => Math.exp(-b1 * x) / (b2 + b3 * x)
const cubicRatio: NonlinearModel = ([b1 = 0, b2 = 0, b3 = 0, b4 = 0, b5 = 0, b6 = 0, b7 = 0]) => x =>
  (b1 + x * (b2 + x * (b3 + x * b4))) / (1 + x * (b5 + x * (b6 + x * b7)))
const twoPeaks: NonlinearModel = ([b1 = 0, b2 = 0, b3 = 0, b4 = 0, b5 = 0, b6 = 0, b7 = 0, b8 = 0]) => x =>
  b1 * Math.exp(-b2 * x) + b3 * Math.exp(-(((x - b4) / b5) ** 2)) + b6 * Math.exp(-(((x - b7) / b8) ** 2))

export const nonlinearModels: Readonly<Record<string, NonlinearModel>> = {
  Misra1a: saturation,
  BoxBOD: saturation,
  Misra1b: ([b1 = 0, b2 = 0]) => x => b1 * (1 - (1 + (b2 * x) / 2) ** -2),
  Misra1c: ([b1 = 0, b2 = 0]) => x => b1 * (1 - (1 + 2 * b2 * x) ** -0.5),
  Misra1d: ([b1 = 0, b2 = 0]) => x => (b1 * b2 * x) / (1 + b2 * x),
  Chwirut1: decay,
  Chwirut2: decay,
  DanWood: ([b1 = 0, b2 = 0]) => x => b1 * x ** b2,
  Gauss1: twoPeaks,
  Thurber: cubicRatio,
  Hahn1: cubicRatio,
  Kirby2: ([b1 = 0, b2 = 0, b3 = 0, b4 = 0, b5 = 0]) => x => (b1 + x * (b2 + x * b3)) / (1 + x * (b4 + x * b5)),
  Rat42: ([b1 = 0, b2 = 0, b3 = 0]) => x => b1 / (1 + Math.exp(b2 - b3 * x)),
  Rat43: ([b1 = 0, b2 = 0, b3 = 0, b4 = 0]) => x => b1 / (1 + Math.exp(b2 - b3 * x)) ** (1 / b4),
  MGH09: ([b1 = 0, b2 = 0, b3 = 0, b4 = 0]) => x => (b1 * (x * x + x * b2)) / (x * x + x * b3 + b4),
  MGH10: ([b1 = 0, b2 = 0, b3 = 0]) => x => b1 * Math.exp(b2 / (x + b3)),
  MGH17: ([b1 = 0, b2 = 0, b3 = 0, b4 = 0, b5 = 0]) => x => b1 + b2 * Math.exp(-x * b4) + b3 * Math.exp(-x * b5),
  Bennett5: ([b1 = 0, b2 = 0, b3 = 0]) => x => b1 * (b2 + x) ** (-1 / b3),
  Eckerle4: ([b1 = 0, b2 = 0, b3 = 0]) => x => (b1 / b2) * Math.exp(-0.5 * ((x - b3) / b2) ** 2),
  Lanczos3: ([b1 = 0, b2 = 0, b3 = 0, b4 = 0, b5 = 0, b6 = 0]) => x =>
    b1 * Math.exp(-b2 * x) + b3 * Math.exp(-b4 * x) + b5 * Math.exp(-b6 * x),
  Roszman1: ([b1 = 0, b2 = 0, b3 = 0, b4 = 0]) => x => b1 - b2 * x - Math.atan(b3 / (x - b4)) / Math.PI,
}

/** Derivatives by formula for some of them; the others run on central differences. */
export const nonlinearJacobians: Readonly<Record<string, NonlinearJacobian>> = {
  Misra1a: saturationJacobian,
  BoxBOD: saturationJacobian,
  DanWood: ([b1 = 0, b2 = 0]) => x => [x ** b2, b1 * x ** b2 * Math.log(x)],
  MGH10: ([b1 = 0, b2 = 0, b3 = 0]) => x => {
    const curve = Math.exp(b2 / (x + b3))
    return [curve, (b1 * curve) / (x + b3), (-b1 * b2 * curve) / (x + b3) ** 2]
  },
  Bennett5: ([b1 = 0, b2 = 0, b3 = 0]) => x => {
    const curve = (b2 + x) ** (-1 / b3)
    return [curve, (-b1 * curve) / (b3 * (b2 + x)), (b1 * curve * Math.log(b2 + x)) / b3 ** 2]
  },
}
