import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { z } from 'zod'
import { access } from '#server/routes/access.ts'
import { errorStatus } from '#shared/contracts/error.ts'
import { operations } from '#shared/contracts/index.ts'
import { startTestApp, type TestApp } from '#tests/helpers/test-app.ts'

const anySchema = z.record(z.string(), z.unknown())
const contentSchema = z.record(z.string().regex(/^[a-z]+\/[a-z+.-]+$/), z.object({ schema: anySchema }))
/** The parts of the OpenAPI 3.1 specification (section 4.8) that the document uses, with what they require. */
const documentSchema = z.strictObject({
  openapi: z.string().regex(/^3\.1\.\d$/),
  info: z.strictObject({ title: z.string().min(1), version: z.string().min(1) }),
  paths: z.record(z.string().startsWith('/api/'), z.partialRecord(z.enum(['get', 'post', 'put', 'patch', 'delete']), z.strictObject({
    operationId: z.string(),
    summary: z.string().min(1),
    description: z.string().min(1),
    parameters: z.array(z.strictObject({ name: z.string(), in: z.enum(['path', 'query', 'header']), required: z.boolean(), description: z.string().optional(), schema: anySchema })),
    requestBody: z.strictObject({ required: z.boolean(), content: contentSchema }).optional(),
    responses: z.record(z.string().regex(/^([1-5]\d\d|default)$/), z.strictObject({ description: z.string().min(1), content: contentSchema.optional() })),
  }))),
  components: z.strictObject({ schemas: z.record(z.string(), anySchema) }),
})

let app: TestApp
let document: z.infer<typeof documentSchema>
beforeAll(async () => {
  app = await startTestApp()
  const answer = await app.visitor().raw.get('/api/openapi.json')
  expect(answer.status).toBe(200)
  document = documentSchema.parse(answer.body)
})
afterAll(() => app.close())

const described = () => Object.entries(document.paths).flatMap(([path, methods]) => Object.entries(methods).map(([method, item]) => ({ path, method, item })))

describe('the OpenAPI document', () => {
  it('describes every operation once, at its address and method, and no other', () => {
    const expected = operations.map(operation => `${operation.id} ${operation.method} ${operation.path.replace(/:(\w+)/g, '{$1}')}`)
    expect(described().map(({ path, method, item }) => `${item?.operationId} ${method} ${path}`).sort()).toEqual(expected.sort())
  })

  it('names every parameter of an address as required, and none that the address lacks', () => {
    for (const { path, item } of described()) {
      const inPath = item?.parameters.filter(parameter => parameter.in === 'path')
      expect(inPath?.map(parameter => parameter.name).sort(), path).toEqual((path.match(/(?<=\{)\w+/g) ?? []).sort())
      expect(inPath?.every(parameter => parameter.required)).toBe(true)
    }
  })

  it('says who may call: each role that the table of rights gives, and no other', () => {
    for (const operation of operations) {
      const item = described().find(one => one.item?.operationId === operation.id)?.item
      const rights = access[operation.id]
      for (const role of ['owner', 'engineer', 'approver', 'technician', 'viewer'] as const) {
        expect([operation.id, role, item?.description.includes(role)]).toEqual([operation.id, role, Array.isArray(rights) && rights.includes(role)])
      }
    }
  })

  it('gives each operation its answer, its body and the problem it may be refused with', () => {
    for (const operation of operations) {
      const item = described().find(one => one.item?.operationId === operation.id)?.item
      expect(Object.keys(item?.responses ?? {}), operation.id).toEqual([String(operation.status), 'default'])
      const answer = item?.responses[String(operation.status)]
      expect(answer?.content !== undefined, operation.id).toBe(operation.response !== undefined || operation.produces !== undefined)
      expect(item?.requestBody !== undefined, operation.id).toBe(operation.body !== undefined || operation.consumes !== undefined)
      expect(Object.keys(item?.responses.default?.content ?? {})).toEqual(['application/problem+json'])
    }
  })

  it('asks for If-Match, Idempotency-Key and X-CSRF-Token where the server does', () => {
    for (const operation of operations) {
      const item = described().find(one => one.item?.operationId === operation.id)?.item
      const headers = item?.parameters.filter(parameter => parameter.in === 'header').map(parameter => parameter.name)
      expect(headers, operation.id).toEqual([
        ...(operation.method === 'get' ? [] : ['X-CSRF-Token']), ...(operation.versioned === true ? ['If-Match'] : []), ...(operation.retrySafe === true ? ['Idempotency-Key'] : []),
      ])
    }
  })

  it('has every reference it uses, and every code of a refusal', () => {
    const references = [...JSON.stringify(document).matchAll(/"\$ref":"([^"]+)"/g)].map(match => match[1] ?? '')
    expect(references.length).toBeGreaterThan(0)
    for (const reference of references) {
      expect(reference).toMatch(/^#\/components\/schemas\/\w+$/)
      expect(document.components.schemas).toHaveProperty(reference.split('/').at(-1) ?? '')
    }
    const codes = z.object({ properties: z.object({ code: z.object({ enum: z.array(z.string()) }) }) }).parse(document.components.schemas.Problem).properties.code.enum
    expect(codes.sort()).toEqual(Object.keys(errorStatus).sort())
  })

  it('keeps the limits of the contracts: an example field by field', () => {
    const body = z.object({ properties: z.object({ password: anySchema, email: anySchema }), required: z.array(z.string()), additionalProperties: z.literal(false) })
      .parse(document.paths['/api/sign-ups']?.post?.requestBody?.content['application/json']?.schema)
    expect(body.properties.password).toMatchObject({ type: 'string', minLength: 12, maxLength: 200 })
    expect(body.required.sort()).toEqual(['displayName', 'email', 'password', 'shopName'])
  })
})
