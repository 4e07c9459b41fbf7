import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { effectScope, shallowRef, type EffectScope } from 'vue'
import { defaultFilmSettings, type Study, type StudyChange } from '#shared/contracts/studies.ts'
import { settled, useFilmSettings } from '@/composables/useFilmSettings.ts'

const base = { film: defaultFilmSettings, name: 'Grey' }
let scope: EffectScope
beforeEach(() => {
  vi.useFakeTimers()
  scope = effectScope()
})
afterEach(() => {
  scope.stop()
  vi.useRealTimers()
})

function setUp(answer: (change: StudyChange) => Promise<boolean>, stale = () => false) {
  const study = shallowRef<Study | undefined>(undefined)
  // Only name and film matter here.
  Object.assign(study, { value: base })
  const handle = scope.run(() => useFilmSettings(study, answer, stale))
  if (handle === undefined) throw new Error('no scope')
  return { study, handle }
}

describe('film settings', () => {
  it('take effect at once and are stored once for all digits of a number', async () => {
    const sent: StudyChange[] = []
    const { handle } = setUp(async change => { sent.push(change); return true })
    void handle.set({ overcureMicrometres: 5 })
    void handle.set({ overcureMicrometres: 55 })
    expect(handle.study.value?.film.overcureMicrometres).toBe(55)
    await vi.advanceTimersByTimeAsync(600)
    expect(sent).toHaveLength(1)
    expect(sent[0]?.film?.overcureMicrometres).toBe(55)
  })

  it('saves one at a time, so that a change never meets itself as somebody else’s', async () => {
    let open = 0
    let most = 0
    const { handle } = setUp(async () => {
      most = Math.max(most, ++open)
      await new Promise(resolve => setTimeout(resolve, 2000))
      open--
      return true
    })
    void handle.set({ depthRatio: 3 })
    await vi.advanceTimersByTimeAsync(700)
    void handle.set({ depthRatio: 4 })
    await vi.advanceTimersByTimeAsync(10_000)
    expect(most).toBe(1)
  })

  it('keeps a change that got no answer, and sends it with the next', async () => {
    const sent: StudyChange[] = []
    let online = false
    const { handle } = setUp(async change => { sent.push(change); return online })
    const first = handle.set({ depthRatio: 3 })
    await vi.advanceTimersByTimeAsync(600)
    expect(await first).toBe(false)
    expect(handle.study.value?.film.depthRatio).toBe(3)
    online = true
    void handle.set({ overcureMicrometres: 40 })
    await vi.advanceTimersByTimeAsync(600)
    expect(sent.at(-1)?.film).toMatchObject({ depthRatio: 3, overcureMicrometres: 40 })
  })

  it('gives a stale change up to the notice that shows both versions', async () => {
    const { handle } = setUp(async () => false, () => true)
    void handle.set({ depthRatio: 3 })
    await vi.advanceTimersByTimeAsync(600)
    expect(handle.study.value?.film.depthRatio).toBe(defaultFilmSettings.depthRatio)
  })

  it('does not forget what was changed again while it was stored', () => {
    expect(settled({ depthRatio: 4, overcureMicrometres: 40 }, { depthRatio: 3, overcureMicrometres: 40 })).toEqual({ depthRatio: 4 })
  })
})
