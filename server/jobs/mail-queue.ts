import { sql } from 'drizzle-orm'
import nodemailer from 'nodemailer'
import PgBoss from 'pg-boss'
import type { Logger } from 'pino'
import type { Executor, Mail, MailQueue } from '../dependencies.ts'

const queueName = 'mail'

export interface RunningMailQueue extends MailQueue {
  /** Finishes the mail in hand and stops looking for more. */
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

/**
 * Mails wait in PostgreSQL and leave by SMTP, with retries: a mail server that is down delays and loses nothing, and a
 * server that dies between the change and the mail sends it when it is back.
 */
export async function startMailQueue(options: {
  readonly databaseUrl: string
  readonly smtpUrl: string
  readonly from: string
  readonly logger: Logger
  readonly pollingSeconds?: number
}): Promise<RunningMailQueue> {
  const { logger } = options
  const boss = new PgBoss({ connectionString: options.databaseUrl, max: 3, application_name: 'fanlight mail' })
  boss.on('error', error => logger.error({ err: error }, 'mail queue'))
  await boss.start()
  await boss.createQueue(queueName)
  const transport = nodemailer.createTransport(options.smtpUrl)
  await boss.work(queueName, { pollingIntervalSeconds: options.pollingSeconds ?? 1, batchSize: 1 }, async jobs => {
    for (const job of jobs) {
      if (!isMail(job.data)) throw new Error('a mail job without a mail')
      const { to, subject, text } = job.data
      await transport.sendMail({ from: options.from, to, subject, text, messageId: `<${job.id}@fanlight.local>` })
    }
  })
  return {
    async enqueue(mail, database) {
      const settings = { retryLimit: 20, retryDelay: 5, retryBackoff: true, expireInSeconds: 120 }
      await boss.send(queueName, { ...mail }, database === undefined ? settings : { ...settings, db: withinTransaction(database) })
    },
    async stop() {
      await boss.stop({ graceful: true, timeout: 5000 })
      transport.close()
    },
  }
}
