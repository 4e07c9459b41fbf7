import { setTimeout as wait } from 'node:timers/promises'
import { sql } from 'drizzle-orm'
import nodemailer from 'nodemailer'
import pg from 'pg'
import PgBoss from 'pg-boss'
import type { Logger } from 'pino'
import type { Executor, Mail, MailQueue } from '../dependencies.ts'
import { loggable } from '../loggable.ts'

const queueName = 'mail'

/** Tries of one mail, the last of them two weeks after the first; a mail waits no longer, since its link is void by then. */
const retries = { retryLimit: 20, retryDelay: 5, retryBackoff: true, retentionDays: 14 }
/** A server that died with a mail in hand is waited for this long before another server sends it. */
const sendSecondsMax = 60

export interface RunningMailQueue extends MailQueue {
  /** Finishes the mail in hand and looks for no more. */
  stop(): Promise<void>
}

function isMail(data: unknown): data is Mail {
  return typeof data === 'object' && data !== null && 'to' in data && 'subject' in data && 'text' in data
}

/** pg-boss speaks SQL with numbered parameters; a Drizzle transaction takes it piece by piece. */
function withinTransaction(database: Executor) {
  return {
    async executeSql(text: string, values: unknown[] = []) {
      const parts = text.split(/\$(\d+)/)
      const chunks = parts.map((part, i) => (i % 2 === 0 ? sql.raw(part) : sql`${sql.param(values[Number(part) - 1])}`))
      const result = await database.execute(sql.join(chunks))
      return { rows: result.rows }
    },
  }
}

/** Any number, the same in every server of one deployment. */
const startLock = 712_554_303

/** pg-boss makes its tables at the first start; two servers that start together would stand in each other's way. */
async function oneAtATime(databaseUrl: string, work: () => Promise<void>): Promise<void> {
  const client = new pg.Client({ connectionString: databaseUrl })
  await client.connect()
  try {
    await client.query('select pg_advisory_lock($1)', [startLock])
    await work()
  } finally {
    // Ending the connection gives the lock back.
    await client.end()
  }
}

/**
 * Mails wait in PostgreSQL and leave by SMTP, with retries: a mail server that is down delays and loses nothing, and a
 * server that dies between the change and the mail sends it when it is back. A mail that was sent is deleted, since its
 * text holds a link that opens something.
 *
 * Every server empties the one queue; no mail is in two hands.
 */
export async function startMailQueue(options: {
  readonly databaseUrl: string
  readonly smtpUrl: string
  readonly from: string
  readonly logger: Logger
  readonly pollingMilliseconds?: number
  readonly retryDelaySeconds?: number
}): Promise<RunningMailQueue> {
  const { logger } = options
  const boss = new PgBoss({
    connectionString: options.databaseUrl, max: 3, application_name: 'fanlight mail', schedule: false, maintenanceIntervalSeconds: 30,
  })
  boss.on('error', error => logger.warn({ err: loggable(error) }, 'mail queue'))
  await oneAtATime(options.databaseUrl, async () => {
    await boss.start()
    await boss.createQueue(queueName)
  })
  const transport = nodemailer.createTransport({ url: options.smtpUrl, connectionTimeout: 10_000, greetingTimeout: 10_000, socketTimeout: 20_000 })
  const settings = { ...retries, retryDelay: options.retryDelaySeconds ?? retries.retryDelay, expireInSeconds: sendSecondsMax }

  async function send(job: PgBoss.Job<unknown>): Promise<void> {
    if (!isMail(job.data)) throw new Error('a mail job without a mail')
    const { to, subject, text } = job.data
    // The same id at every try, so that a mailbox may drop a second copy.
    await transport.sendMail({ from: options.from, to, subject, text, messageId: `<${job.id}@fanlight>` })
  }

  async function deliver(job: PgBoss.Job<unknown>): Promise<void> {
    try {
      await send(job)
    } catch (error) {
      logger.warn({ err: loggable(error), job: job.id }, 'a mail could not be handed over; it is tried again')
      await boss.fail(queueName, job.id, { message: error instanceof Error ? error.message : 'unknown' })
      return
    }
    await boss.deleteJob(queueName, job.id)
  }

  const stopping = new AbortController()
  const pause = () => wait(options.pollingMilliseconds ?? 1000, undefined, { signal: stopping.signal }).catch(() => {})

  // pg-boss's own worker does not wait for its last word on a job; while PostgreSQL restarts that would end the process.
  async function emptyQueue(): Promise<void> {
    while (!stopping.signal.aborted) {
      try {
        const [job] = await boss.fetch(queueName, { batchSize: 1 })
        if (job === undefined) await pause()
        else await deliver(job)
      } catch (error) {
        logger.warn({ err: loggable(error) }, 'mail queue')
        await pause()
      }
    }
  }
  const emptying = emptyQueue()

  return {
    async enqueue(mail, database) {
      const { to, subject, text } = mail
      await boss.send(queueName, { to, subject, text }, database === undefined ? settings : { ...settings, db: withinTransaction(database) })
    },
    async stop() {
      stopping.abort()
      await emptying
      await boss.stop({ graceful: false })
      transport.close()
    },
  }
}
