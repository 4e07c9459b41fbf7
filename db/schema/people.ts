import { sql } from 'drizzle-orm'
import { bigint, boolean, check, index, integer, json, jsonb, pgEnum, pgTable, primaryKey, text, timestamp, uniqueIndex, uuid, varchar } from 'drizzle-orm/pg-core'
import { id, instant } from './columns.ts'

export const memberRole = pgEnum('member_role', ['owner', 'engineer', 'approver', 'technician', 'viewer'])

export const user = pgTable('user', {
  id: id(),
  /** Always lower case: the address is the sign-in name. */
  email: varchar('email', { length: 254 }).notNull(),
  displayName: varchar('display_name', { length: 120 }).notNull(),
  passwordHash: text('password_hash').notNull(),
  createdAt: instant('created_at').notNull().default(sql`now()`),
}, t => [
  uniqueIndex('user_email_unique').on(t.email),
  check('user_email_lower', sql`${t.email} = lower(${t.email})`),
])

export const shop = pgTable('shop', {
  id: id(),
  name: varchar('name', { length: 120 }).notNull(),
  demo: boolean('demo').notNull().default(false),
  version: integer('version').notNull().default(1),
  createdAt: instant('created_at').notNull().default(sql`now()`),
}, t => [
  // Seeding twice at the same moment must not make two demo shops.
  uniqueIndex('shop_one_demo').on(t.demo).where(sql`${t.demo}`),
])

export const membership = pgTable('membership', {
  shopId: uuid('shop_id').notNull().references(() => shop.id, { onDelete: 'cascade' }),
  userId: uuid('user_id').notNull().references(() => user.id, { onDelete: 'cascade' }),
  role: memberRole('role').notNull(),
  joinedAt: instant('joined_at').notNull().default(sql`now()`),
}, t => [
  primaryKey({ columns: [t.shopId, t.userId] }),
  // Sign-in asks for the shops of a person.
  index('membership_user').on(t.userId),
])

export const invitation = pgTable('invitation', {
  id: id(),
  shopId: uuid('shop_id').notNull().references(() => shop.id, { onDelete: 'cascade' }),
  email: varchar('email', { length: 254 }).notNull(),
  role: memberRole('role').notNull(),
  /** SHA-256 of the token in the mail: the table alone opens nothing. */
  tokenHash: varchar('token_hash', { length: 64 }).notNull(),
  invitedByUserId: uuid('invited_by_user_id').references(() => user.id, { onDelete: 'set null' }),
  createdAt: instant('created_at').notNull().default(sql`now()`),
  expiresAt: instant('expires_at').notNull(),
  acceptedAt: instant('accepted_at'),
  revokedAt: instant('revoked_at'),
}, t => [
  uniqueIndex('invitation_token_unique').on(t.tokenHash),
  // One open invitation per address and shop: a new one replaces it.
  uniqueIndex('invitation_one_open').on(t.shopId, t.email).where(sql`${t.acceptedAt} is null and ${t.revokedAt} is null`),
])

/** A sign-up that waits for the link in its mail. */
export const signUp = pgTable('sign_up', {
  id: id(),
  email: varchar('email', { length: 254 }).notNull(),
  displayName: varchar('display_name', { length: 120 }).notNull(),
  shopName: varchar('shop_name', { length: 120 }).notNull(),
  passwordHash: text('password_hash').notNull(),
  tokenHash: varchar('token_hash', { length: 64 }).notNull(),
  createdAt: instant('created_at').notNull().default(sql`now()`),
  expiresAt: instant('expires_at').notNull(),
  confirmedAt: instant('confirmed_at'),
}, t => [uniqueIndex('sign_up_token_unique').on(t.tokenHash)])

export const passwordReset = pgTable('password_reset', {
  id: id(),
  userId: uuid('user_id').notNull().references(() => user.id, { onDelete: 'cascade' }),
  tokenHash: varchar('token_hash', { length: 64 }).notNull(),
  createdAt: instant('created_at').notNull().default(sql`now()`),
  expiresAt: instant('expires_at').notNull(),
  usedAt: instant('used_at'),
}, t => [uniqueIndex('password_reset_token_unique').on(t.tokenHash)])

/** The shape that connect-pg-simple expects, plus the owner so that a reset can end every session of a person. */
export const session = pgTable('session', {
  sid: varchar('sid').primaryKey(),
  sess: json('sess').notNull(),
  expire: timestamp('expire', { precision: 6, withTimezone: false }).notNull(),
}, t => [index('session_expire').on(t.expire)])

export const auditEvent = pgTable('audit_event', {
  id: id(),
  shopId: uuid('shop_id').notNull().references(() => shop.id, { onDelete: 'cascade' }),
  actorUserId: uuid('actor_user_id').references(() => user.id, { onDelete: 'set null' }),
  /** Verb in the past: "created", "changed", "retired". */
  action: varchar('action', { length: 60 }).notNull(),
  thing: varchar('thing', { length: 60 }).notNull(),
  thingId: uuid('thing_id'),
  before: jsonb('before'),
  after: jsonb('after'),
  at: instant('at').notNull().default(sql`now()`),
}, t => [
  // The history of one thing, and the newest of a shop.
  index('audit_event_thing').on(t.shopId, t.thing, t.thingId, t.at),
  index('audit_event_shop_time').on(t.shopId, t.at),
])

/** Answers of creates, kept a day, so that a retry with the same Idempotency-Key gets the first answer. */
export const idempotencyKey = pgTable('idempotency_key', {
  shopId: uuid('shop_id').notNull().references(() => shop.id, { onDelete: 'cascade' }),
  userId: uuid('user_id').notNull().references(() => user.id, { onDelete: 'cascade' }),
  key: varchar('key', { length: 200 }).notNull(),
  requestHash: varchar('request_hash', { length: 64 }).notNull(),
  status: integer('status'),
  response: jsonb('response'),
  createdAt: instant('created_at').notNull().default(sql`now()`),
}, t => [primaryKey({ columns: [t.shopId, t.userId, t.key] })])

/** Counters of rate limits, in the shape that rate-limiter-flexible expects. */
export const rateLimit = pgTable('rate_limit', {
  key: varchar('key', { length: 255 }).primaryKey(),
  points: integer('points').notNull().default(0),
  expire: bigint('expire', { mode: 'number' }),
})
