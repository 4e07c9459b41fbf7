import { createPinia, setActivePinia } from 'pinia'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { csrfToken, forgetCsrfToken } from '@/api/csrf.ts'
import { queryClient } from '@/api/query-client.ts'
import { useSessionStore } from '@/stores/session.ts'

const shopId = '0198a0a0-0000-7000-8000-000000000001'
const person = (last: number) => ({ id: `0198a0a0-0000-7000-8000-00000000001${last}`, displayName: `Person ${last}`, email: `p${last}@shop.example` })
const session = (user: ReturnType<typeof person> | null, csrf: string) => ({
  csrfToken: csrf, user, mailbox: false, demoSignIns: [],
  memberships: user === null ? [] : [{ shopId, shopName: 'North', role: 'technician' as const, demo: false }],
})
const fetchMock = vi.fn<typeof fetch>()
const answers = (body: unknown) => fetchMock.mockImplementationOnce(async () => new Response(JSON.stringify(body)))

beforeEach(() => {
  setActivePinia(createPinia())
  vi.stubGlobal('fetch', fetchMock)
})
afterEach(() => {
  fetchMock.mockReset()
  vi.unstubAllGlobals()
  forgetCsrfToken()
  queryClient.clear()
})

describe('the session', () => {
  it('is asked for once, however many pages want it at the same time', async () => {
    answers(session(person(1), 'first'))
    const store = useSessionStore()
    await Promise.all([store.load(), store.load(), store.load()])
    await store.load()
    expect(fetchMock).toHaveBeenCalledTimes(1)
    expect(store.user?.displayName).toBe('Person 1')
  })

  it('is asked for again after the server gave no answer', async () => {
    fetchMock.mockRejectedValueOnce(new TypeError('no network'))
    const store = useSessionStore()
    await expect(store.load()).rejects.toThrow()
    answers(session(person(1), 'first'))
    await expect(store.load()).resolves.toMatchObject({ csrfToken: 'first' })
  })

  it('brings the token that the next write carries', async () => {
    const store = useSessionStore()
    store.take(session(null, 'before'))
    store.take(session(person(1), 'after'))
    expect(await csrfToken()).toBe('after')
  })

  it('takes what one person saw from the next, and leaves it to the same one', () => {
    const store = useSessionStore()
    store.take(session(person(1), 'a'))
    queryClient.setQueryData(['printers'], ['North bench'])
    store.take(session(person(1), 'b'))
    expect(queryClient.getQueryData(['printers'])).toEqual(['North bench'])
    store.take(session(person(2), 'c'))
    expect(queryClient.getQueryData(['printers'])).toBeUndefined()
  })

  it('knows the role in each shop, and none in a foreign one', () => {
    const store = useSessionStore()
    store.take(session(person(1), 'a'))
    expect(store.roleIn(shopId)).toBe('technician')
    expect(store.roleIn('0198a0a0-0000-7000-8000-000000000002')).toBeNull()
  })
})
