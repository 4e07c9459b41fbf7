import argon2 from 'argon2'
import { v7 } from 'uuid'
import { connectDatabase } from '../client.ts'
import { migrateDatabase } from '../migrate.ts'
import { seedDemoShop } from '../seed/index.ts'

const url = process.env.DATABASE_URL
if (url === undefined) throw new Error('DATABASE_URL is not set')
await migrateDatabase(url)
const { database, close } = connectDatabase({ url })
// Cost as the server's own hashing (OWASP's first recommendation for argon2id).
const hashPassword = (password: string) => argon2.hash(password, { type: argon2.argon2id, memoryCost: 19_456, timeCost: 2, parallelism: 1 })
await seedDemoShop(database, { clock: () => new Date(), newId: () => v7(), hashPassword }).finally(close)
