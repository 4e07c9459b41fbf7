import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { startTestApp, type TestApp } from '#tests/helpers/test-app.ts'

let app: TestApp
let folder: string
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'fanlight-client-'))
  mkdirSync(join(folder, 'assets'))
  writeFileSync(join(folder, 'index.html'), '<!doctype html><title>Client</title>')
  writeFileSync(join(folder, 'assets', 'main-12345678.js'), 'export {}')
  app = await startTestApp({ environment: { CLIENT_FOLDER: folder } })
})
afterAll(async () => {
  await app.close()
  rmSync(folder, { recursive: true, force: true })
})

const get = (path: string) => app.visitor().raw.get(path)
/** The rules of the content security policy, by their names. */
async function policyOf(path: string): Promise<Map<string, string>> {
  const header = String((await get(path)).headers['content-security-policy'])
  return new Map(header.split(';').map(rule => {
    const [name = '', ...sources] = rule.trim().split(' ')
    return [name, sources.join(' ')]
  }))
}

describe.each(['/', '/shop/x/bench', '/assets/main-12345678.js', '/api/session', '/api/nothing', '/nothing.txt'])('%s', path => {
  it('runs scripts of our own files only: none in the page, none from elsewhere, no eval', async () => {
    const policy = await policyOf(path)
    expect(policy.get('script-src')).toBe("'self'")
    expect(policy.get('script-src-attr')).toBe("'none'")
    expect(policy.get('default-src')).toBe("'self'")
    expect(policy.get('object-src')).toBe("'none'")
    expect(policy.get('connect-src')).toBe("'self'")
    expect([...policy.values()].join(' ')).not.toContain('unsafe-eval')
  })

  it('cannot be framed, guessed at by type, or told on by referrer; says nothing of what it is built with', async () => {
    const { headers } = await get(path)
    expect(headers['content-security-policy']).toContain("frame-ancestors 'none'")
    expect(headers['x-content-type-options']).toBe('nosniff')
    expect(headers['referrer-policy']).toBe('no-referrer')
    expect(headers['cross-origin-opener-policy']).toBe('same-origin')
    expect(headers['x-powered-by']).toBeUndefined()
    expect(headers.server).toBeUndefined()
  })
})

describe('caching', () => {
  it('answers of the API are kept by nobody, files with a hash in their name for a year, the page is asked for again', async () => {
    expect((await get('/api/session')).headers['cache-control']).toBe('no-store')
    expect((await get('/assets/main-12345678.js')).headers['cache-control']).toBe('public, max-age=31536000, immutable')
    expect((await get('/shop/x/bench')).headers['cache-control']).toBe('no-cache')
  })
})

describe('the client’s pages', () => {
  it('every page address answers the one document, files that do not exist do not', async () => {
    for (const path of ['/', '/sign-in', '/shop/01890000-0000-7000-8000-000000000000/studies', '/invitation?token=x']) {
      const answer = await get(path)
      expect([path, answer.status, answer.text]).toEqual([path, 200, '<!doctype html><title>Client</title>'])
    }
    for (const path of ['/missing.js', '/assets/missing-1.js', '/../package.json', '/%2e%2e/package.json', '/.env', '/assets/%00']) expect([path, (await get(path)).status >= 400]).toEqual([path, true])
  })
})

describe('health', () => {
  it('answers whether the database does', async () => {
    const answer = await get('/api/health')
    expect([answer.status, answer.body]).toEqual([200, { ok: true }])
  })
})
