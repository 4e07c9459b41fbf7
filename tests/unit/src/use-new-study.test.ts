import { QueryClient, VueQueryPlugin } from '@tanstack/vue-query'
import { flushPromises, mount } from '@vue/test-utils'
import { createPinia, setActivePinia } from 'pinia'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { computed, defineComponent } from 'vue'
import { forgetCsrfToken } from '@/api/csrf.ts'
import { useNewStudy } from '@/composables/useNewStudy.ts'
import { useSessionStore } from '@/stores/session.ts'

const id = (last: number) => `0198a0a0-0000-7000-8000-00000000000${last}`
const [shop, printer, resin, pairing, somebody, another] = [id(1), id(2), id(3), id(4), id(5), id(6)]
const at = '2026-01-01T00:00:00Z'
const storedPairing = { id: pairing, version: 1, createdAt: at, updatedAt: at, retiredAt: null, printerId: printer, printerName: 'P', resinId: resin, resinName: 'R', notes: '', studyCount: 0 }
const fetchMock = vi.fn<typeof fetch>()

function open(userId: string, given = { printerId: printer ?? '', resinId: resin ?? '' }) {
  const pinia = createPinia()
  setActivePinia(pinia)
  useSessionStore().take({ csrfToken: 'token', user: { id: userId, displayName: 'A', email: 'a@b.example' }, memberships: [], mailbox: false, demoSignIns: [] })
  let study: ReturnType<typeof useNewStudy> | undefined
  const Host = defineComponent({
    setup() {
      study = useNewStudy(computed(() => shop ?? ''), given)
      return () => null
    },
  })
  const page = mount(Host, { global: { plugins: [pinia, [VueQueryPlugin, { queryClient: new QueryClient({ defaultOptions: { queries: { retry: false } } }) }]] } })
  if (study === undefined) throw new Error('it is made in setup')
  return { study, page }
}

const creates = (thing: 'pairings' | 'studies') => fetchMock.mock.calls.flatMap(([address, given]) =>
  given?.method === 'POST' && String(address).endsWith(thing) ? [{ key: new Headers(given.headers).get('Idempotency-Key'), body: JSON.parse(String(given.body)) }] : [])

beforeEach(() => {
  sessionStorage.clear()
  // Headers carry Latin-1 only; the real fetch refuses the rest before anything is sent.
  fetchMock.mockImplementation(async (address, given) => {
    new Headers(given?.headers)
    if (given?.method === 'POST' && String(address).endsWith('pairings')) return new Response(JSON.stringify(storedPairing))
    if (given?.method === 'POST') throw new TypeError('no network')
    return new Response(JSON.stringify({ items: [], nextCursor: null, total: 0 }))
  })
  vi.stubGlobal('fetch', fetchMock)
})
afterEach(() => {
  fetchMock.mockReset()
  vi.unstubAllGlobals()
  forgetCsrfToken()
})

describe('a new study', () => {
  it('is still there after a reload, with the name that was written', async () => {
    const first = open(somebody ?? '')
    Object.assign(first.study.fields, { name: 'Łódź 試験', layerHeightMicrometres: 35, notes: 'half a senten' })
    first.study.named.value = true
    await flushPromises()
    first.page.unmount()
    const { study } = open(somebody ?? '')
    expect(study.fields).toMatchObject({ name: 'Łódź 試験', layerHeightMicrometres: 35, notes: 'half a senten', printerId: printer, resinId: resin })
    await flushPromises()
    expect(study.fields.name).toBe('Łódź 試験')
  })

  it('is shown to nobody else, and not to who comes from another pairing', async () => {
    const first = open(somebody ?? '')
    first.study.fields.notes = 'mine'
    await flushPromises()
    first.page.unmount()
    expect(open(another ?? '').study.fields.notes).toBe('')
    expect(open(somebody ?? '', { printerId: pairing ?? '', resinId: resin ?? '' }).study.fields.notes).toBe('')
  })

  it('sends nothing while something is missing, and says what', async () => {
    const { study } = open(somebody ?? '', { printerId: '', resinId: resin ?? '' })
    study.fields.layerHeightMicrometres = null
    expect(await study.open()).toBeNull()
    expect(creates('pairings')).toEqual([])
    expect([study.errorOf('printerId'), study.errorOf('layerHeightMicrometres'), study.errorOf('resinId')]).toEqual(['Choose a printer.', 'Say the layer height.', undefined])
  })

  it('goes out again under the same key, and under a new one when anything was changed, whatever its name', async () => {
    const { study } = open(somebody ?? '')
    Object.assign(study.fields, { name: 'Łódź 試験', layerHeightMicrometres: 50 })
    study.named.value = true
    await flushPromises()
    await study.open()
    await study.open()
    study.fields.layerHeightMicrometres = 60
    await flushPromises()
    await study.open()
    const sent = creates('studies')
    expect(sent.map(({ body }) => body)).toMatchObject([50, 50, 60].map(layerHeightMicrometres => ({ name: 'Łódź 試験', pairingId: pairing, layerHeightMicrometres })))
    const keys = sent.map(({ key }) => key)
    expect(keys[0]).toBe(keys[1])
    expect(keys[2]).not.toBe(keys[0])
    expect(study.error.value).toMatchObject({ name: 'OfflineError' })
  })
})
