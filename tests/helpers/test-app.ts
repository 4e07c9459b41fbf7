import { createServer, type Server } from 'node:http'
import { pino, type Logger } from 'pino'
import { v7 } from 'uuid'
import { membership, shop, user } from '#db/schema/index.ts'
import { createApp } from '#server/app.ts'
import { readConfig } from '#server/config.ts'
import type { Dependencies, Mail, MailQueue } from '#server/dependencies.ts'
import { hashPassword } from '#server/services/passwords.ts'
import type { Role } from '#shared/contracts/common.ts'
import { TestAgent } from './test-agent.ts'
import { createTestDatabase } from './test-database.ts'

export { TestAgent, type TestAnswer } from './test-agent.ts'

/** Everybody's password in tests: hashed once, since hashing is slow on purpose. */
export const testPassword = 'light for everyone'

export interface TestPerson {
  readonly userId: string
  readonly email: string
  readonly displayName: string
}
export interface TestMember extends TestPerson {
  readonly shopId: string
  readonly role: Role
  /** A browser in which this person is signed in. */
  readonly agent: TestAgent
}

export interface TestAppOptions {
  /** Factor on the rate limits; high unless the test is about them. */
  readonly rateLimitFactor?: number
  readonly environment?: Readonly<Record<string, string>>
  readonly logger?: Logger
  readonly mailQueue?: MailQueue
  readonly change?: Partial<Dependencies>
}

/** The real time, moved on by as much as a test says. */
export class TestClock {
  private offsetMilliseconds = 0
  readonly now = (): Date => new Date(Date.now() + this.offsetMilliseconds)
  advance(milliseconds: number): void {
    this.offsetMilliseconds += milliseconds
  }
}

/**
 * The whole app on a fresh database, listening on loopback, with mail caught instead of sent.
 *
 * @example
 * const app = await startTestApp()
 * const { owner, shopId } = await app.makeShop()
 * const members = await owner.agent.ok(listMembers, { params: { shopId } })
 */
export async function startTestApp(options: TestAppOptions = {}) {
  const database = await createTestDatabase()
  const config = readConfig({
    DATABASE_URL: database.url, NODE_ENV: 'test', SESSION_SECRET: 'a secret for tests, thirty-two characters long', LOG_LEVEL: 'silent',
    PUBLIC_URL: 'http://fanlight.test', RATE_LIMIT_FACTOR: String(options.rateLimitFactor ?? 1000), ...options.environment,
  })
  const clock = new TestClock()
  const mails: Mail[] = []
  const dependencies: Dependencies = {
    config, database: database.database, pool: database.pool, clock: clock.now, newId: v7, demoSignIns: [],
    logger: options.logger ?? pino({ level: 'silent' }),
    mailQueue: options.mailQueue ?? { enqueue: async mail => void mails.push(mail) },
    mailbox: {
      list: async () => mails.map((mail, i) => ({
        id: String(i), from: config.mailFrom, to: [mail.to], subject: mail.subject, text: mail.text, links: linksIn(mail), caughtAt: clock.now().toISOString(),
      })).reverse(),
    },
    ...options.change,
  }
  const server: Server = createServer(createApp(dependencies))
  await new Promise<void>(resolve => server.listen(0, '127.0.0.1', resolve))
  const visitor = (): TestAgent => new TestAgent(server)
  const passwordHash = hashPassword(testPassword)
  let people = 0

  async function makePerson(displayName?: string): Promise<TestPerson> {
    const n = ++people
    const person = { userId: v7(), email: `person-${n}@quillmere.example`, displayName: displayName ?? `Person ${n}` }
    await database.database.insert(user).values({ id: person.userId, email: person.email, displayName: person.displayName, passwordHash: await passwordHash })
    return person
  }

  async function signedIn(person: TestPerson): Promise<TestAgent> {
    const agent = visitor()
    await agent.signIn(person.email, testPassword)
    return agent
  }

  /** A new person, or one who exists, with a role in a shop, signed in. */
  async function makeMember(shopId: string, role: Role, person?: TestPerson): Promise<TestMember> {
    const member = person ?? (await makePerson())
    await database.database.insert(membership).values({ shopId, userId: member.userId, role })
    return { ...member, shopId, role, agent: await signedIn(member) }
  }

  /** A new shop with its owner. */
  async function makeShop(name = 'Testing shop'): Promise<{ shopId: string; owner: TestMember }> {
    const shopId = v7()
    await database.database.insert(shop).values({ id: shopId, name })
    return { shopId, owner: await makeMember(shopId, 'owner') }
  }

  return {
    ...database, dependencies, config, server, clock, mails,
    visitor, makePerson, makeMember, makeShop, signedIn,
    /** The newest mail to an address. */
    mailTo(email: string): Mail {
      const found = mails.findLast(mail => mail.to === email)
      if (found === undefined) throw new Error(`no mail to ${email}`)
      return found
    },
    async close(): Promise<void> {
      server.closeAllConnections()
      await new Promise(resolve => server.close(resolve))
      await database.drop()
    },
  }
}
export type TestApp = Awaited<ReturnType<typeof startTestApp>>

export function linksIn(mail: Mail): string[] {
  return mail.text.match(/https?:\/\/[^\s<>"]+/g) ?? []
}

/** The token in the link of a mail. */
export function tokenIn(mail: Mail): string {
  for (const link of linksIn(mail)) {
    const token = new URL(link).searchParams.get('token')
    if (token !== null) return token
  }
  throw new Error(`no link with a token in "${mail.subject}"`)
}
