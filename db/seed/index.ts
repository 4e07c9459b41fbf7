import { inArray } from 'drizzle-orm'
import type { Database } from '../client.ts'
import { membership, shop, user } from '../schema/index.ts'
import { daysFrom } from './context.ts'
import { demoPeople, type DemoPerson } from './people.ts'
import { seedStudies } from './studies.ts'
import { seedThings } from './things.ts'

export { demoPeople, type DemoPerson }

/** The invented shop's name. */
export const demoShopName = 'Quillmere Print Room (demo)'

export interface SeedOptions {
  /** Dates of the demo shop (a lot that expires soon, work of last week) lie around this moment. */
  readonly clock: () => Date
  /** uuid v7 */
  readonly newId: () => string
  readonly hashPassword: (password: string) => Promise<string>
}

/**
 * Makes the demo shop once, whole or not at all: invented people in every role, printers, resins, lots and film studies.
 * Two servers that start together make one; a shop that is there stays as people left it.
 *
 * @returns its people with their passwords, to show beside the sign-in
 * @example
 * await seedDemoShop(database, { clock: () => new Date(), newId: v7, hashPassword })
 */
export async function seedDemoShop(database: Database, { clock, newId, hashPassword }: SeedOptions): Promise<readonly DemoPerson[]> {
  const now = clock()
  await database.transaction(async transaction => {
    const shopId = newId()
    // The unique index shop_one_demo makes a second seeding wait here and then find the first.
    const made = await transaction
      .insert(shop)
      .values({ id: shopId, name: demoShopName, demo: true, createdAt: daysFrom(now, -320) })
      .onConflictDoNothing()
      .returning({ id: shop.id })
    if (made.length === 0) return

    const people = await Promise.all(demoPeople.map(async person => ({ person, passwordHash: await hashPassword(person.password) })))
    await transaction
      .insert(user)
      .values(people.map(({ person, passwordHash }) => ({ id: newId(), email: person.email, displayName: person.displayName, passwordHash, createdAt: daysFrom(now, -310) })))
      .onConflictDoNothing()
    const users = await transaction.select({ id: user.id, email: user.email }).from(user).where(inArray(user.email, demoPeople.map(person => person.email)))
    const idOf = (role: DemoPerson['role']) => {
      const email = demoPeople.find(person => person.role === role)?.email
      const found = users.find(row => row.email === email)
      if (found === undefined) throw new Error(`the demo shop has no ${role}`)
      return found.id
    }
    await transaction.insert(membership).values(demoPeople.map(person => ({ shopId, userId: idOf(person.role), role: person.role, joinedAt: daysFrom(now, -300) })))

    const context = { shopId, now, newId, userIds: { engineer: idOf('engineer'), technician: idOf('technician') } }
    await seedStudies(transaction, context, await seedThings(transaction, context))
  })
  return demoPeople
}
