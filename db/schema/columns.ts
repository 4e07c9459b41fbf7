import { sql } from 'drizzle-orm'
import { doublePrecision, integer, timestamp, uuid } from 'drizzle-orm/pg-core'

/** Ids are uuid v7, made by the application, so that they sort by time and a client may make its own. */
export const id = () => uuid('id').primaryKey()

export const instant = (name: string) => timestamp(name, { withTimezone: true, mode: 'date' })

/** What every thing that people edit carries; `version` is what If-Match names. */
export const lifecycle = () => ({
  version: integer('version').notNull().default(1),
  createdAt: instant('created_at').notNull().default(sql`now()`),
  updatedAt: instant('updated_at').notNull().default(sql`now()`),
  retiredAt: instant('retired_at'),
})

export const quantity = (name: string) => doublePrecision(name)
