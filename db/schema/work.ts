import { sql } from 'drizzle-orm'
import { boolean, check, foreignKey, index, integer, jsonb, pgEnum, pgTable, primaryKey, text, unique, uniqueIndex, uuid, varchar } from 'drizzle-orm/pg-core'
import { id, instant, lifecycle, quantity } from './columns.ts'
import { shop, user } from './people.ts'
import { lot, pairing } from './things.ts'

export const studyState = pgEnum('study_state', ['open', 'paused', 'decided'])
export const exposureKind = pgEnum('exposure_kind', ['seconds', 'mJ/cm2'])
export const filmReadingState = pgEnum('film_reading_state', ['measured', 'no-film', 'lost-in-wash', 'excluded'])

const shopId = () => uuid('shop_id').notNull().references(() => shop.id, { onDelete: 'cascade' })

export const study = pgTable('study', {
  id: id(),
  shopId: shopId(),
  pairingId: uuid('pairing_id').notNull(),
  lotId: uuid('lot_id'),
  name: varchar('name', { length: 120 }).notNull(),
  layerHeightMicrometres: quantity('layer_height_micrometres').notNull(),
  resinTemperatureCelsius: quantity('resin_temperature_celsius'),
  exposureKind: exposureKind('exposure_kind').notNull().default('seconds'),
  state: studyState('state').notNull().default('open'),
  notes: text('notes').notNull().default(''),
  /** Parsed by the contract's schema on the way out. */
  detailTarget: jsonb('detail_target'),
  film: jsonb('film').notNull(),
  /** Rises by one with every saved reading; the fit below is of one revision. */
  readingsRevision: integer('readings_revision').notNull().default(0),
  ...lifecycle(),
}, t => [
  unique('study_shop_id_id').on(t.shopId, t.id),
  foreignKey({ name: 'study_pairing_same_shop', columns: [t.shopId, t.pairingId], foreignColumns: [pairing.shopId, pairing.id] }),
  foreignKey({ name: 'study_lot_same_shop', columns: [t.shopId, t.lotId], foreignColumns: [lot.shopId, lot.id] }),
  // Lists of a shop are sorted by last change; the bench gathers by pairing.
  index('study_shop_updated').on(t.shopId, t.updatedAt),
  index('study_pairing').on(t.shopId, t.pairingId),
  check('study_layer_height', sql`${t.layerHeightMicrometres} > 0 and ${t.layerHeightMicrometres} <= 1000`),
])

export const importBatch = pgTable('import_batch', {
  id: id(),
  shopId: shopId(),
  studyId: uuid('study_id').notNull(),
  fileName: varchar('file_name', { length: 200 }).notNull(),
  mapping: jsonb('mapping').notNull(),
  acceptedRows: integer('accepted_rows').notNull(),
  rejectedRows: integer('rejected_rows').notNull(),
  /** The rejected rows with line and reasons, to give back as CSV. */
  rejected: jsonb('rejected').notNull(),
  /** Header cells of the file, first line of the CSV of rejected rows. */
  header: jsonb('header').notNull(),
  importedByUserId: uuid('imported_by_user_id').references(() => user.id, { onDelete: 'set null' }),
  importedAt: instant('imported_at').notNull().default(sql`now()`),
  withdrawnAt: instant('withdrawn_at'),
}, t => [
  unique('import_batch_shop_id_id').on(t.shopId, t.id),
  foreignKey({ name: 'import_batch_study_same_shop', columns: [t.shopId, t.studyId], foreignColumns: [study.shopId, study.id] }).onDelete('cascade'),
  index('import_batch_study').on(t.shopId, t.studyId, t.importedAt),
])

export const filmReading = pgTable('film_reading', {
  id: id(),
  shopId: shopId(),
  studyId: uuid('study_id').notNull(),
  exposure: quantity('exposure').notNull(),
  exposureText: varchar('exposure_text', { length: 100 }).notNull(),
  replicate: integer('replicate').notNull(),
  depthMicrometres: quantity('depth_micrometres'),
  depthText: varchar('depth_text', { length: 100 }).notNull(),
  standardUncertaintyMicrometres: quantity('standard_uncertainty_micrometres'),
  state: filmReadingState('state').notNull(),
  exclusionReason: varchar('exclusion_reason', { length: 400 }),
  note: varchar('note', { length: 400 }).notNull().default(''),
  importBatchId: uuid('import_batch_id').references(() => importBatch.id, { onDelete: 'set null' }),
  version: integer('version').notNull().default(1),
  enteredByUserId: uuid('entered_by_user_id').references(() => user.id, { onDelete: 'set null' }),
  enteredAt: instant('entered_at').notNull().default(sql`now()`),
  updatedAt: instant('updated_at').notNull().default(sql`now()`),
  withdrawnAt: instant('withdrawn_at'),
}, t => [
  foreignKey({ name: 'film_reading_study_same_shop', columns: [t.shopId, t.studyId], foreignColumns: [study.shopId, study.id] }).onDelete('cascade'),
  // One cell of the grid holds one reading; also the order in which a study is read.
  uniqueIndex('film_reading_cell').on(t.studyId, t.exposure, t.replicate).where(sql`${t.withdrawnAt} is null`),
  index('film_reading_batch').on(t.importBatchId).where(sql`${t.importBatchId} is not null`),
  // NaN and infinity are greater than every bound in PostgreSQL, so bounds on both sides keep them out.
  check('film_reading_exposure', sql`${t.exposure} > 0 and ${t.exposure} <= 1e9`),
  check('film_reading_depth', sql`${t.depthMicrometres} is null or (${t.depthMicrometres} >= -1e5 and ${t.depthMicrometres} <= 1e5)`),
  check('film_reading_measured', sql`${t.state} <> 'measured' or ${t.depthMicrometres} is not null`),
  check('film_reading_excluded', sql`${t.state} <> 'excluded' or ${t.exclusionReason} is not null`),
])

/** Former values: written in the same transaction as the edit. */
export const filmReadingRevision = pgTable('film_reading_revision', {
  readingId: uuid('reading_id').notNull().references(() => filmReading.id, { onDelete: 'cascade' }),
  /** The version that these values had. */
  version: integer('version').notNull(),
  shopId: shopId(),
  before: jsonb('before').notNull(),
  changedByUserId: uuid('changed_by_user_id').references(() => user.id, { onDelete: 'set null' }),
  changedAt: instant('changed_at').notNull().default(sql`now()`),
}, t => [primaryKey({ columns: [t.readingId, t.version] })])

/** The mapping a person chose for files with this header. */
export const importMapping = pgTable('import_mapping', {
  shopId: shopId(),
  headerHash: varchar('header_hash', { length: 64 }).notNull(),
  mapping: jsonb('mapping').notNull(),
  updatedAt: instant('updated_at').notNull().default(sql`now()`),
}, t => [primaryKey({ columns: [t.shopId, t.headerHash] })])

/** Fits kept with the hash of their inputs and the library version: recomputable to the same digits. */
export const fit = pgTable('fit', {
  studyId: uuid('study_id').notNull(),
  shopId: shopId(),
  kind: varchar('kind', { length: 40 }).notNull(),
  inputsHash: varchar('inputs_hash', { length: 64 }).notNull(),
  libraryVersion: varchar('library_version', { length: 40 }).notNull(),
  readingsRevision: integer('readings_revision').notNull(),
  settled: boolean('settled').notNull().default(false),
  outcome: jsonb('outcome').notNull(),
  computedAt: instant('computed_at').notNull().default(sql`now()`),
}, t => [
  // The latest fit of a kind is replaced as readings move; settled ones stay for the sheets that rest on them.
  primaryKey({ columns: [t.studyId, t.kind, t.inputsHash] }),
  foreignKey({ name: 'fit_study_same_shop', columns: [t.shopId, t.studyId], foreignColumns: [study.shopId, study.id] }).onDelete('cascade'),
])
