import { z } from 'zod'

export const idSchema = z.uuid()
export const instantSchema = z.iso.datetime({ offset: true })
/** A day from 1900 on: an earlier one is a typing slip, and PostgreSQL knows no year 0. */
export const dateSchema = z.iso.date().refine(day => day >= '1900-01-01', 'From 1900 on.')

/** Names of things: column `name` is varchar(120). */
export const nameSchema = z.string().trim().min(1, 'Give it a name.').max(120, 'At most 120 characters.')
/** Notes: kept to a size that a list can still carry. */
export const notesSchema = z.string().max(4000, 'At most 4000 characters.')

/** A finite number above zero; the upper limit keeps sums and squares finite. */
export const positiveSchema = z.number().positive('Must be above zero.').max(1e9, 'Too large to be meant.')

/** 254 characters is the longest address that SMTP carries (RFC 5321, path limit 256 with its brackets). */
export const emailSchema = z
  .string()
  .trim()
  .toLowerCase()
  .max(254)
  .pipe(z.email('This does not look like an e-mail address.'))

/** Length over composition rules; 12 keeps guessing expensive, 200 keeps hashing cheap. */
export const newPasswordSchema = z
  .string()
  .min(12, 'At least 12 characters: a short sentence is a good password.')
  .max(200, 'At most 200 characters.')

export const shopParamsSchema = z.object({ shopId: idSchema })

export const listStateSchema = z.enum(['active', 'retired', 'all']).default('active')

/** Cursor paging: the cursor is opaque, made by the server. It holds a name of up to 120 characters, each of up to 6 bytes. */
export const pageQuerySchema = z.object({
  cursor: z.string().max(1500).optional(),
  limit: z.coerce.number().int().min(1).max(200).default(50),
})

export function pageSchema<Item extends z.ZodType>(item: Item) {
  return z.object({ items: z.array(item), nextCursor: z.string().nullable(), total: z.int() })
}

/** What every thing that people edit carries. `version` is what `If-Match` names. */
export const lifecycleSchema = z.object({
  id: idSchema,
  version: z.int().min(1),
  createdAt: instantSchema,
  updatedAt: instantSchema,
  retiredAt: instantSchema.nullable(),
})

export const roles = ['owner', 'engineer', 'approver', 'technician', 'viewer'] as const
export const roleSchema = z.enum(roles)
export type Role = z.infer<typeof roleSchema>
