import { sql } from 'drizzle-orm'
import { check, date, foreignKey, index, pgTable, text, unique, uniqueIndex, uuid, varchar } from 'drizzle-orm/pg-core'
import { id, lifecycle, quantity } from './columns.ts'
import { shop } from './people.ts'

const shopId = () => uuid('shop_id').notNull().references(() => shop.id, { onDelete: 'cascade' })

export const printer = pgTable('printer', {
  id: id(),
  shopId: shopId(),
  name: varchar('name', { length: 120 }).notNull(),
  lightEngineWavelengthNanometres: quantity('light_engine_wavelength_nanometres').notNull(),
  pixelSizeMicrometres: quantity('pixel_size_micrometres').notNull(),
  plateWidthMillimetres: quantity('plate_width_millimetres').notNull(),
  plateDepthMillimetres: quantity('plate_depth_millimetres').notNull(),
  exposureStepSeconds: quantity('exposure_step_seconds').notNull(),
  exposureSecondsMin: quantity('exposure_seconds_min').notNull(),
  exposureSecondsMax: quantity('exposure_seconds_max').notNull(),
  irradianceMilliwattsPerSquareCentimetre: quantity('irradiance_milliwatts_per_square_centimetre'),
  notes: text('notes').notNull().default(''),
  ...lifecycle(),
}, t => [
  // Two printers of one name in use would be confused at the bench; retired ones may keep theirs.
  uniqueIndex('printer_name_unique').on(t.shopId, sql`lower(${t.name})`).where(sql`${t.retiredAt} is null`),
  // Target of composite foreign keys: a pairing can never join things of two shops.
  unique('printer_shop_id_id').on(t.shopId, t.id),
  // PostgreSQL holds NaN greater than every number, so an upper bound keeps it out.
  check('printer_exposure_range', sql`${t.exposureSecondsMin} > 0 and ${t.exposureSecondsMax} > ${t.exposureSecondsMin} and ${t.exposureSecondsMax} <= 3600`),
  check('printer_exposure_step', sql`${t.exposureStepSeconds} > 0 and ${t.exposureStepSeconds} <= 60`),
])

export const resin = pgTable('resin', {
  id: id(),
  shopId: shopId(),
  name: varchar('name', { length: 120 }).notNull(),
  description: varchar('description', { length: 400 }).notNull().default(''),
  notes: text('notes').notNull().default(''),
  ...lifecycle(),
}, t => [
  uniqueIndex('resin_name_unique').on(t.shopId, sql`lower(${t.name})`).where(sql`${t.retiredAt} is null`),
  unique('resin_shop_id_id').on(t.shopId, t.id),
])

export const lot = pgTable('lot', {
  id: id(),
  shopId: shopId(),
  resinId: uuid('resin_id').notNull(),
  code: varchar('code', { length: 120 }).notNull(),
  receivedOn: date('received_on', { mode: 'string' }),
  openedOn: date('opened_on', { mode: 'string' }),
  expiresOn: date('expires_on', { mode: 'string' }),
  notes: text('notes').notNull().default(''),
  ...lifecycle(),
}, t => [
  uniqueIndex('lot_code_unique').on(t.shopId, t.resinId, sql`lower(${t.code})`).where(sql`${t.retiredAt} is null`),
  unique('lot_shop_id_id').on(t.shopId, t.id),
  foreignKey({ name: 'lot_resin_same_shop', columns: [t.shopId, t.resinId], foreignColumns: [resin.shopId, resin.id] }),
])

export const pairing = pgTable('pairing', {
  id: id(),
  shopId: shopId(),
  printerId: uuid('printer_id').notNull(),
  resinId: uuid('resin_id').notNull(),
  notes: text('notes').notNull().default(''),
  ...lifecycle(),
}, t => [
  unique('pairing_unique').on(t.shopId, t.printerId, t.resinId),
  unique('pairing_shop_id_id').on(t.shopId, t.id),
  foreignKey({ name: 'pairing_printer_same_shop', columns: [t.shopId, t.printerId], foreignColumns: [printer.shopId, printer.id] }),
  foreignKey({ name: 'pairing_resin_same_shop', columns: [t.shopId, t.resinId], foreignColumns: [resin.shopId, resin.id] }),
  index('pairing_resin').on(t.shopId, t.resinId),
])
