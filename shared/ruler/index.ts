/** The exposure ruler as pure geometry and as a sentence; drawn as SVG on screens and on paper. */

export { rulerGeometry } from './ruler-geometry.ts'
export { rulerSentence } from './ruler-sentence.ts'
export type { RulerContent, RulerDot, RulerGeometry, RulerSize, RulerSpan, RulerTick, RulerWindow } from './types.ts'
