import { migrateDatabase } from '../migrate.ts'

const url = process.env.DATABASE_URL
if (url === undefined) throw new Error('DATABASE_URL is not set')
await migrateDatabase(url)
