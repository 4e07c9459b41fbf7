import { gzipSync } from 'node:zlib'
import { Writable } from 'node:stream'
import { pino } from 'pino'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { connectDatabase } from '#db/client.ts'
import { errorStatus, problemSchema } from '#shared/contracts/error.ts'
import { operations } from '#shared/contracts/index.ts'
import type { Operation } from '#shared/contracts/operation.ts'
import { getSession, signUp } from '#shared/contracts/session.ts'
import { startTestApp, type TestAnswer, type TestApp, type TestMember } from '#tests/helpers/test-app.ts'
import { makeWholeShop, type WholeShop } from '#tests/helpers/whole-shop.ts'

let app: TestApp
let shop: WholeShop
let owner: TestMember
const log: string[] = []
beforeAll(async () => {
  const sink = new Writable({ write: (chunk: Buffer, _encoding, done) => (log.push(chunk.toString()), done()) })
  app = await startTestApp({ logger: pino({ level: 'debug' }, sink) })
  shop = await makeWholeShop(app)
  owner = await app.makeMember(shop.shopId, 'owner')
})
beforeEach(() => log.splice(0))
afterAll(() => app.close())

const writes = operations.filter(operation => operation.body !== undefined).map(operation => [operation.id, operation] as const)
const reads = operations.filter(operation => operation.query !== undefined && operation.method === 'get').map(operation => [operation.id, operation] as const)
const operationNamed = (id: string): Operation => {
  const found = operations.find(operation => operation.id === id)
  if (found === undefined) throw new Error(id)
  return found
}

/** Refused with a problem of the table, or taken; never a failure of ours, and no inner text. */
function expectDecent(answer: TestAnswer, what: string): void {
  expect(answer.status, `${what}: ${answer.text.slice(0, 300)}`).toBeLessThan(500)
  if (answer.status < 400) return
  expect(answer.headers['content-type'], what).toMatch(/^application\/problem\+json/)
  const problem = problemSchema.parse(answer.body)
  expect(errorStatus[problem.code], what).toBe(answer.status)
  expect(problem.requestId).toMatch(/^[0-9a-f-]{36}$/)
  expect(problem.detail.length, what).toBeLessThan(500)
  expect(answer.text, what).not.toMatch(/node_modules|\.ts:\d|select |insert into|syntax error|at position|Unexpected token/i)
}
const send = (operation: Operation, body: unknown, headers: Readonly<Record<string, string>> = {}) =>
  owner.agent.call(operation, { params: shop.params, version: 1, body, headers })

const wholeBodies: readonly (readonly [string, string])[] = [
  ['nothing', ''], ['null', 'null'], ['a list', '[]'], ['a text', '"text"'], ['a number', '123'], ['half an object', '{"email":'], ['NaN as a number', '{"name":NaN}'],
  ['__proto__', '{"__proto__":{"role":"owner","isAdmin":true}}'], ['constructor', '{"constructor":{"prototype":{"polluted":true}}}'],
  ['an unknown field', '{"nobody":"asked"}'], ['lists twenty thousand deep', '['.repeat(20_000) + ']'.repeat(20_000)],
  ['objects twenty thousand deep', '{"a":'.repeat(20_000) + '1' + '}'.repeat(20_000)], ['ten thousand fields', `{${Array.from({ length: 10_000 }, (_, i) => `"k${i}":1`).join(',')}}`],
]
const values: readonly (readonly [string, unknown])[] = [
  ['null', null], ['true', true], ['a list', []], ['an object', {}], ['an object named __proto__', JSON.parse('{"__proto__":{"x":1}}')], ['1e308', 1e308], ['-1e308', -1e308], ['5e-324', 5e-324],
  ['the text NaN', 'NaN'], ['the text Infinity', 'Infinity'], ['an empty text', ''], ['a zero byte', 'a\u0000b'], ['half a surrogate', 'a\ud800b'], ['a long text', 'x'.repeat(100_000)],
  ['a text of combining marks', 'e' + '\u0301'.repeat(100)], ['right-to-left marks', '\u202eabc'], ['a quote and a comment', "'; drop table shop; --"], ['a big whole number', 2 ** 53], ['a number past 64 bits', 1e19], ['-0', -0],
]

describe.each(writes)('%s', (id, operation) => {
  const valid = () => structuredClone(shop.bodies[id] ?? {})

  it('has a valid body in the walk, which is not refused for its form', async () => {
    expect(shop.bodies[id], `tests/helpers/whole-shop.ts lacks a body for ${id}`).toBeDefined()
    expect(operation.body?.safeParse(valid()).success).toBe(true)
  })

  it.each(wholeBodies)('refuses %s as a whole body', async (what, body) => {
    const answer = await send(operation, body)
    expectDecent(answer, what)
    // Where every field may be left out, a body that says nothing changes nothing.
    if (answer.status < 400) expect(operation.body?.safeParse(JSON.parse(body === '' ? '{}' : body)).success).toBe(true)
  })

  it('answers every hostile value in every field decently', async () => {
    for (const field of Object.keys(valid())) {
      for (const [what, value] of values) expectDecent(await send(operation, { ...valid(), [field]: value }), `${field} = ${what}`)
    }
  })

  it('refuses a field that the contract does not have', async () => {
    for (const extra of ['shopId', 'role2', 'version', 'isAdmin']) {
      expect((await send(operation, { ...valid(), [extra]: 1 })).status, extra).toBe(422)
    }
    expect((await send(operation, `{"__proto__":{"a":1},${JSON.stringify(valid()).slice(1)}`)).status).toBeLessThan(500)
    expect(({} as Record<string, unknown>).a).toBeUndefined()
  })
})

describe.each(reads)('%s', (_id, operation) => {
  it.each([
    ['a limit of zero', 'limit=0'], ['a limit of NaN', 'limit=NaN'], ['a huge limit', 'limit=1e308'], ['a limit twice', 'limit=1&limit=2'], ['a nested limit', 'limit[a]=1'],
    ['an unknown sort', 'sort=password'], ['a sort with SQL', "sort=name;drop table shop"], ['a cursor of rubbish', 'cursor=%00%ff'], ['a cursor of JSON', 'cursor=eyJhIjoxfQ'], ['a cursor of a list', 'cursor=WzEsMl0'],
    ['a search for a zero byte', 'q=%00'], ['a search for wildcards', 'q=%25_%5C'], ['a broken escape', 'q=%E0%A4%A'], ['__proto__', '__proto__=1'], ['a state that is none', 'state=gone'],
  ])('answers %s decently', async (what, query) => {
    const path = operation.path.replace(/:(\w+)/g, (_, name: string) => shop.params[name] ?? '')
    const answer = await owner.agent.raw.get(`${path}?${query}`)
    expectDecent({ ...answer, status: answer.status, headers: answer.headers, body: answer.body, text: answer.text, cookies: [] }, what)
  })
})

describe('requests that are no requests', () => {
  const paths = operations.filter(operation => operation.path.includes(':')).map(operation => [operation.id, operation] as const)
  it.each(paths)('%s answers ids that are none as things that do not exist', async (id, operation) => {
    for (const bad of ['1', 'null', '%00', '%2e%2e', "'--", 'x'.repeat(2000), '01890000-0000-7000-8000-00000000000g']) {
      for (const name of operation.path.match(/(?<=:)\w+/g) ?? []) {
        const path = operation.path.replace(/:(\w+)/g, (_, param: string) => (param === name ? bad : (shop.params[param] ?? '')))
        const answer = await owner.agent.raw[operation.method](path).set('X-CSRF-Token', (await owner.agent.session()).csrfToken).set('If-Match', '"1"').send(shop.bodies[id] ?? undefined)
        expect(answer.status, `${path.slice(0, 200)}: ${answer.text.slice(0, 200)}`).toBe(404)
      }
    }
  })

  it('a body larger than two megabytes is refused, also one that grows when unpacked', async () => {
    const big = JSON.stringify({ name: 'x'.repeat(2_100_000) })
    expect((await send(operationNamed('createShop'), big)).status).toBe(413)
    const { csrfToken } = await owner.agent.session()
    const bomb = gzipSync(Buffer.alloc(100_000_000, 'a'))
    const answer = await owner.agent.raw.post('/api/shops').set({ 'X-CSRF-Token': csrfToken, 'Content-Type': 'application/json', 'Content-Encoding': 'gzip' }).serialize(body => body).send(bomb)
    expect(answer.status).toBe(413)
  })

  it.each([['gzip'], ['br'], ['rot13']])('a body that is not the %s it says is refused', async encoding => {
    const answer = await send(operationNamed('createShop'), '{"name":"plain"}', { 'Content-Encoding': encoding })
    expectDecent(answer, encoding)
    expect([400, 415]).toContain(answer.status)
  })

  it.each([['text/plain'], ['application/x-www-form-urlencoded'], ['multipart/form-data; boundary=x'], ['application/json; charset=utf-7']])('a body sent as %s is refused', async type => {
    const answer = await send(operationNamed('createShop'), 'name=Made by a form', { 'Content-Type': type })
    expectDecent(answer, type)
    expect(answer.status).toBeGreaterThanOrEqual(400)
  })

  it.each([['"x"'], ['1'], ['*'], ['"-1"'], ['"99999999999"'], ['W/"1", "2"'], ['"1" or 1=1']])('If-Match %s is asked for again', async value => {
    const answer = await owner.agent.call(operationNamed('renameShop'), { params: shop.params, body: { name: 'x' }, headers: { 'If-Match': value } })
    expect(problemSchema.parse(answer.body).code).toBe('if-match-required')
  })

  it('addresses and methods that the API does not have are not found', async () => {
    for (const [method, path] of [['get', '/api/nothing'], ['get', '/api/shops'], ['put', '/api/session'], ['get', '/api/'], ['get', '/api/SESSION'], ['post', '/api/shops/../session']] as const) {
      const { csrfToken } = await owner.agent.session()
      const answer = await owner.agent.raw[method](path).set('X-CSRF-Token', csrfToken)
      expect([path, answer.status]).toEqual([path, 404])
      expect(problemSchema.parse(answer.body).code).toBe('not-found')
    }
  })

  it('an Idempotency-Key of 201 characters is refused', async () => {
    const answer = await owner.agent.call(operationNamed('createResin'), { params: shop.params, body: shop.bodies.createResin, key: 'k'.repeat(201) })
    expect(problemSchema.parse(answer.body).code).toBe('bad-request')
  })
})

describe('a failure of ours', () => {
  it('answers 500 with a number to tell, and neither statement, values nor stack; the log has the statement without values', async () => {
    await app.pool.query('alter table sign_up rename to sign_up_away')
    try {
      const answer = await app.visitor().call(signUp, { body: shop.bodies.signUp })
      expect(answer.status).toBe(500)
      const problem = problemSchema.parse(answer.body)
      expect(problem.code).toBe('server-error')
      expect(problem.detail).toContain(problem.requestId)
      expect(answer.text).not.toMatch(/sign_up|relation|walker|node_modules/)
      const lines = log.join('')
      expect(lines).toContain(problem.requestId)
      expect(lines).toContain('relation \\"sign_up\\" does not exist')
      expect(lines).not.toMatch(/argon2id|walker@/)
    } finally {
      await app.pool.query('alter table sign_up_away rename to sign_up')
    }
  })

  it('a database that is away answers 503 and that nothing was saved', async () => {
    // Nobody listens on port 1.
    const nowhere = connectDatabase({ url: 'postgres://nobody@127.0.0.1:1/nowhere' })
    const cut = await startTestApp({ change: { pool: nowhere.pool, database: nowhere.database } })
    try {
      const health = await cut.visitor().raw.get('/api/health')
      expect([health.status, problemSchema.parse(health.body).code]).toEqual([503, 'service-unavailable'])
      const answer = await cut.visitor().refused(signUp, { body: shop.bodies.signUp })
      expect(answer.code).toBe('service-unavailable')
      expect(answer.detail).toContain('Nothing was saved')
    } finally {
      await nowhere.close()
      await cut.close()
    }
  })
})

describe('what stands in the log', () => {
  it('is neither a password, a token, a cookie nor an address of a person, also at the level debug', async () => {
    const agent = app.visitor()
    await agent.ok(signUp, { body: { email: 'logged@quillmere.example', displayName: 'Logged', shopName: 'Log', password: 'never in any log' } })
    const { csrfToken } = await agent.ok(getSession)
    await agent.raw.get('/api/session?token=secret-in-the-address')
    const lines = log.join('')
    expect(lines).toContain('/api/sign-ups')
    for (const secret of ['never in any log', 'logged@quillmere.example', 'secret-in-the-address', csrfToken, 'fanlight.csrf=']) expect(lines).not.toContain(secret)
  })
})
