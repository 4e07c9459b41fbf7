import type { Server } from 'node:http'
import request from 'supertest'
import type { Operation, OperationResponse } from '#shared/contracts/operation.ts'
import { problemSchema, type Problem } from '#shared/contracts/error.ts'
import { sessionSchema, signIn, signOut, type Session } from '#shared/contracts/session.ts'

export interface TestCall {
  readonly params?: Readonly<Record<string, string>>
  readonly query?: Readonly<Record<string, string | number>>
  /** Sent as JSON; text is sent as it is. */
  readonly body?: unknown
  /** Sent as If-Match. */
  readonly version?: number
  /** Sent as Idempotency-Key. */
  readonly key?: string
  readonly headers?: Readonly<Record<string, string>>
}

export interface TestAnswer {
  readonly status: number
  readonly headers: Readonly<Record<string, string>>
  readonly body: unknown
  readonly text: string
  /** Set-Cookie lines. */
  readonly cookies: readonly string[]
}

/** A browser: keeps cookies and sends the CSRF token of its session with every write. */
export class TestAgent {
  readonly raw: ReturnType<typeof request.agent>
  private csrfToken: string | null = null

  constructor(server: Server) {
    this.raw = request.agent(server)
  }

  async signIn(email: string, password: string): Promise<Session> {
    return this.ok(signIn, { body: { email, password } })
  }

  async signOut(): Promise<Session> {
    return this.ok(signOut)
  }

  async session(): Promise<Session> {
    const { body } = await this.raw.get('/api/session')
    const session = sessionSchema.parse(body)
    this.csrfToken = session.csrfToken
    return session
  }

  /** Calls an operation, whatever the answer. Headers given as an empty text are left out. */
  async call(operation: Operation, given: TestCall = {}): Promise<TestAnswer> {
    const path = operation.path.replace(/:(\w+)/g, (_, name: string) => encodeURIComponent(given.params?.[name] ?? `no-${name}`))
    const headers = new Map(Object.entries(given.headers ?? {}))
    if (operation.method !== 'get' && !headers.has('X-CSRF-Token')) headers.set('X-CSRF-Token', this.csrfToken ?? (await this.session()).csrfToken)
    if (given.version !== undefined) headers.set('If-Match', `"${given.version}"`)
    if (given.key !== undefined) headers.set('Idempotency-Key', given.key)

    const test = this.raw[operation.method](path).query(given.query ?? {})
    for (const [name, value] of headers) if (value !== '') test.set(name, value)
    if (given.body !== undefined) {
      if (!headers.has('Content-Type')) test.type('application/json')
      test.send(typeof given.body === 'string' ? given.body : JSON.stringify(given.body))
    }
    const answer = await test
    const body: unknown = answer.body
    if (typeof body === 'object' && body !== null && 'csrfToken' in body && typeof body.csrfToken === 'string') this.csrfToken = body.csrfToken
    const cookies: unknown = answer.headers['set-cookie']
    return { status: answer.status, headers: answer.headers, body, text: answer.text, cookies: Array.isArray(cookies) ? cookies.map(String) : [] }
  }

  /** Calls an operation that must succeed; answers the parsed response. */
  async ok<O extends Operation>(operation: O, given: TestCall = {}): Promise<OperationResponse<O>> {
    const answer = await this.call(operation, given)
    if (answer.status !== operation.status) throw new Error(`${operation.id} answered ${answer.status}: ${answer.text}`)
    // The parsed value has the type of the operation's response schema.
    return operation.response?.parse(answer.body) as OperationResponse<O>
  }

  /** Calls an operation that must be refused; answers the problem, its shape checked. */
  async refused(operation: Operation, given: TestCall = {}): Promise<Problem> {
    const answer = await this.call(operation, given)
    if (answer.status < 400) throw new Error(`${operation.id} was not refused: ${answer.status}`)
    if (!answer.headers['content-type']?.startsWith('application/problem+json')) throw new Error(`${operation.id} answered ${answer.status} without a problem: ${answer.text}`)
    const problem = problemSchema.parse(answer.body)
    if (problem.status !== answer.status) throw new Error(`${operation.id} answered ${answer.status} and said ${problem.status}`)
    return problem
  }
}
