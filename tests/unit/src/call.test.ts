import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { z } from 'zod'
import { operation } from '#shared/contracts/operation.ts'
import { addressOf, ApiError, call, OfflineError } from '@/api/call.ts'
import { forgetCsrfToken, keepCsrfToken } from '@/api/csrf.ts'

const read = operation({ id: 'read', method: 'get', path: '/api/shops/:shopId/things', summary: '', params: z.object({ shopId: z.string() }), query: z.object({ q: z.string().optional() }), response: z.object({ n: z.number() }), status: 200 })
const write = operation({ id: 'write', method: 'patch', path: '/api/things/:id', summary: '', params: z.object({ id: z.string() }), body: z.object({ n: z.number() }), response: z.object({ n: z.number() }), status: 200, versioned: true })

const problem = (code: string, status: number) => new Response(JSON.stringify({ type: '', title: '', status, code, detail: 'Because.', requestId: 'r1' }), { status })
const answer = (body: unknown) => new Response(JSON.stringify(body), { status: 200 })
const fetchMock = vi.fn<typeof fetch>()

beforeEach(() => {
  vi.stubGlobal('fetch', fetchMock)
  keepCsrfToken('token-1')
})
afterEach(() => {
  fetchMock.mockReset()
  vi.unstubAllGlobals()
  forgetCsrfToken()
})

describe('call', () => {
  it('fills the address, leaves empty filters out, and escapes what could break out of the path', () => {
    expect(addressOf(read, { shopId: 'a/../b?c' }, { q: 'x y', page: undefined, empty: '' })).toBe('/api/shops/a%2F..%2Fb%3Fc/things?q=x+y')
  })

  it('sends token and version with a write, and parses the answer', async () => {
    fetchMock.mockResolvedValue(answer({ n: 2, more: 'dropped' }))
    expect(await call(write, { params: { id: '7' }, body: { n: 1 }, baseVersion: 3 })).toEqual({ n: 2 })
    const [address, given] = fetchMock.mock.calls[0] ?? []
    expect(address).toBe('/api/things/7')
    expect(given).toMatchObject({ method: 'PATCH', body: '{"n":1}', headers: { 'X-CSRF-Token': 'token-1', 'If-Match': '"3"', 'Content-Type': 'application/json' } })
  })

  it('fetches a new token and sends once more when another tab renewed the session', async () => {
    fetchMock.mockResolvedValueOnce(problem('csrf-token-missing', 403)).mockResolvedValueOnce(answer({ csrfToken: 'token-2' })).mockResolvedValueOnce(answer({ n: 1 }))
    await expect(call(write, { params: { id: '7' }, body: { n: 1 }, baseVersion: 1 })).resolves.toEqual({ n: 1 })
    expect(fetchMock.mock.calls[2]?.[1]?.headers).toMatchObject({ 'X-CSRF-Token': 'token-2' })
  })

  it('does not send for ever when the new token is refused too', async () => {
    fetchMock.mockImplementation(async address => (address === '/api/session' ? answer({ csrfToken: 'x' }) : problem('csrf-token-missing', 403)))
    await expect(call(write, { params: { id: '7' }, body: { n: 1 }, baseVersion: 1 })).rejects.toBeInstanceOf(ApiError)
    expect(fetchMock).toHaveBeenCalledTimes(3)
  })

  it('tells a refusal with its sentence from no answer at all', async () => {
    fetchMock.mockResolvedValueOnce(problem('not-allowed', 403))
    await expect(call(read, { params: { shopId: 's' } })).rejects.toMatchObject({ message: 'Because.', problem: { code: 'not-allowed' } })
    fetchMock.mockRejectedValueOnce(new TypeError('network'))
    await expect(call(read, { params: { shopId: 's' } })).rejects.toBeInstanceOf(OfflineError)
  })

  it('makes a plain problem of an answer that is none, such as a proxy’s page', async () => {
    fetchMock.mockResolvedValueOnce(new Response('<html>', { status: 502 }))
    await expect(call(read, { params: { shopId: 's' } })).rejects.toMatchObject({ problem: { code: 'service-unavailable', status: 502 } })
  })

  it('refuses an answer of another shape instead of passing it on', async () => {
    fetchMock.mockResolvedValueOnce(answer({ n: 'two' }))
    await expect(call(read, { params: { shopId: 's' } })).rejects.toThrow()
  })
})
