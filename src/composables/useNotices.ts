import { readonly, shallowRef } from 'vue'

export interface Notice {
  readonly id: number
  readonly text: string
  readonly kind: 'good' | 'serious'
  /** Offered for as long as the notice stands. */
  readonly undo?: (() => unknown) | undefined
}

const notices = shallowRef<readonly Notice[]>([])
let nextId = 1
const standMilliseconds = 8000

function dismiss(id: number): void {
  notices.value = notices.value.filter(notice => notice.id !== id)
}

/** Short messages at the edge of the screen: what was done, with a way back. */
export function useNotices() {
  function say(text: string, options: { kind?: Notice['kind']; undo?: () => unknown } = {}): void {
    const notice: Notice = { id: nextId++, text, kind: options.kind ?? 'good', undo: options.undo }
    notices.value = [...notices.value.slice(-2), notice]
    setTimeout(() => dismiss(notice.id), standMilliseconds)
  }
  return { notices: readonly(notices), say, dismiss }
}
