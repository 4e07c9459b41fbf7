import { z } from 'zod'
import { instantSchema } from './common.ts'
import { operation } from './operation.ts'

/** Mail caught by the fake SMTP server on loopback. Absent in production. */
export const caughtMailSchema = z.object({
  id: z.string(),
  from: z.string(),
  to: z.array(z.string()),
  subject: z.string(),
  text: z.string(),
  /** Links found in the text, in order. */
  links: z.array(z.string()),
  caughtAt: instantSchema,
})
export type CaughtMail = z.infer<typeof caughtMailSchema>

export const listCaughtMail = operation({
  id: 'listCaughtMail',
  method: 'get',
  path: '/api/development/mails',
  summary: 'Mail caught on this machine, newest first (development only)',
  response: z.object({ items: z.array(caughtMailSchema) }),
  status: 200,
})
