import { z } from 'zod'
import { problemSchema } from '#shared/contracts/error.ts'
import type { Operation } from '#shared/contracts/operation.ts'

type JsonSchema = Record<string, unknown>

const toJsonSchema = (schema: z.ZodType, io: 'input' | 'output'): JsonSchema => {
  const made: JsonSchema = { ...z.toJSONSchema(schema, { io, unrepresentable: 'any' }) }
  // The dialect is OpenAPI 3.1's own.
  delete made.$schema
  return made
}

/** Parameters of one place (path or query), one by one, as OpenAPI wants them. */
function parametersOf(schema: z.ZodType | undefined, place: 'path' | 'query'): JsonSchema[] {
  if (schema === undefined) return []
  const { properties = {}, required = [] } = toJsonSchema(schema, 'input') as { properties?: Record<string, JsonSchema>; required?: string[] }
  return Object.entries(properties).map(([name, property]) => ({
    name, in: place, required: place === 'path' || required.includes(name), schema: property,
  }))
}

function headersOf(operation: Operation): JsonSchema[] {
  const header = (name: string, required: boolean, description: string) => ({ name, in: 'header', required, description, schema: { type: 'string' } })
  return [
    ...(operation.method === 'get' ? [] : [header('X-CSRF-Token', true, 'From GET /api/session.')]),
    ...(operation.versioned === true ? [header('If-Match', true, 'The version that was edited, in quotes: "3".')] : []),
    ...(operation.retrySafe === true ? [header('Idempotency-Key', false, 'Any text of up to 200 characters; a retry with it gets the first answer.')] : []),
  ]
}

function answersOf(operation: Operation): JsonSchema {
  const content = operation.response !== undefined
    ? { 'application/json': { schema: toJsonSchema(operation.response, 'output') } }
    : operation.produces === undefined ? undefined : { [operation.produces]: { schema: { type: 'string' } } }
  return {
    [operation.status]: { description: operation.summary, ...(content === undefined ? {} : { content }) },
    default: { description: 'Refused, with the reason', content: { 'application/problem+json': { schema: { $ref: '#/components/schemas/Problem' } } } },
  }
}

/** The OpenAPI 3.1 document, made from the contracts that the server parses with. */
export function openApiDocument(operations: readonly Operation[], rightsOf: (operation: Operation) => string): JsonSchema {
  const paths: Record<string, Record<string, JsonSchema>> = {}
  for (const operation of operations) {
    const path = operation.path.replace(/:(\w+)/g, '{$1}')
    const requestBody = operation.body !== undefined
      ? { required: true, content: { 'application/json': { schema: toJsonSchema(operation.body, 'input') } } }
      : operation.consumes === undefined ? undefined : { required: true, content: { [operation.consumes]: { schema: { type: 'string' } } } }
    paths[path] = {
      ...paths[path],
      [operation.method]: {
        operationId: operation.id,
        summary: operation.summary,
        description: rightsOf(operation),
        parameters: [...parametersOf(operation.params, 'path'), ...parametersOf(operation.query, 'query'), ...headersOf(operation)],
        ...(requestBody === undefined ? {} : { requestBody }),
        responses: answersOf(operation),
      },
    }
  }
  return {
    openapi: '3.1.0',
    info: { title: 'Fanlight API', version: '1' },
    paths,
    components: { schemas: { Problem: toJsonSchema(problemSchema, 'output') } },
  }
}
