import type pg from 'pg'
import type { Logger } from 'pino'
import type { CaughtMail } from '#shared/contracts/development.ts'
import type { Role } from '#shared/contracts/common.ts'
import type { Database, Executor } from '#db/client.ts'
import type { Config } from './config.ts'

export type { Database, Executor }

export interface Mail {
  readonly to: string
  readonly subject: string
  readonly text: string
}

/** Where mail is handed over: a queue in PostgreSQL, emptied by SMTP. */
export interface MailQueue {
  /** Inside a transaction the mail leaves only if the transaction commits. */
  enqueue(mail: Mail, database?: Executor): Promise<void>
}

/** The fake SMTP server's mailbox; null where a real mail server is set. */
export interface Mailbox {
  list(): Promise<readonly CaughtMail[]>
}

export interface DemoSignIn {
  readonly email: string
  readonly password: string
  readonly role: Role
  readonly displayName: string
}

/** Everything the app needs from outside; tests hand in their own. */
export interface Dependencies {
  readonly config: Config
  readonly database: Database
  readonly pool: pg.Pool
  readonly logger: Logger
  readonly mailQueue: MailQueue
  readonly mailbox: Mailbox | null
  readonly demoSignIns: readonly DemoSignIn[]
  readonly clock: () => Date
  /** uuid v7 */
  readonly newId: () => string
}
