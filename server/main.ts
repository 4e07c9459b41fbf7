import { setTimeout as wait } from 'node:timers/promises'
import { pino } from 'pino'
import { v7 } from 'uuid'
import { connectDatabase } from '#db/client.ts'
import { migrateDatabase } from '#db/migrate.ts'
import { seedDemoShop } from '#db/seed/index.ts'
import { createApp } from './app.ts'
import { readConfig } from './config.ts'
import { startMailQueue } from './jobs/mail-queue.ts'
import { startFakeMailServer } from './mail/mailbox.ts'
import { postgresCode } from './middleware/errors.ts'
import { hashPassword } from './services/passwords.ts'

const config = readConfig(process.env)
const logger = pino({ level: config.logLevel }, pino.destination(2))
const clock = () => new Date()

/** PostgreSQL may come up a moment after us, on this machine or another. */
async function migrateWhenReachable(): Promise<void> {
  for (let attempt = 1; ; attempt++) {
    try {
      return await migrateDatabase(config.databaseUrl)
    } catch (error) {
      const code = postgresCode(error)
      if (attempt === 15 || (code !== 'ECONNREFUSED' && code !== '57P03')) throw error
      await wait(1000)
    }
  }
}

await migrateWhenReachable()
const connection = connectDatabase({ url: config.databaseUrl, connectionsMax: config.databaseConnectionsMax })
const demoSignIns = config.demoShop ? await seedDemoShop(connection.database, { newId: v7, clock, hashPassword }) : []
const mailbox = config.smtpUrl === null ? await startFakeMailServer(clock) : null
const mailQueue = await startMailQueue({
  databaseUrl: config.databaseUrl,
  smtpUrl: config.smtpUrl ?? mailbox?.smtpUrl ?? '',
  from: config.mailFrom,
  logger,
})

const app = createApp({
  config, database: connection.database, pool: connection.pool, logger, mailQueue, mailbox, demoSignIns, clock, newId: v7,
})
const server = app.listen(config.port, config.host, error => {
  if (error !== undefined) {
    logger.fatal({ err: error }, 'cannot listen')
    process.exit(1)
  }
  const address = server.address()
  const port = typeof address === 'object' && address !== null ? address.port : config.port
  const demo = demoSignIns.map(({ email, password, role }) => ({ email, password, role }))
  process.stdout.write(`FANLIGHT_READY ${JSON.stringify({ url: `http://${config.host}:${port}`, demo })}\n`)
})

let closing = false
async function close(): Promise<void> {
  if (closing) return
  closing = true
  // Answers under way are finished; idle connections are closed so that they do not keep us.
  const hard = setTimeout(() => process.exit(1), 10_000)
  hard.unref()
  await new Promise<void>(resolve => {
    server.close(() => resolve())
    server.closeIdleConnections()
  })
  await mailQueue.stop()
  await mailbox?.close()
  await connection.close()
  process.exit(0)
}
process.on('SIGTERM', () => void close())
process.on('SIGINT', () => void close())
if (process.env.FANLIGHT_ENDS_WITH_INPUT === 'yes') {
  // Whoever started us holds our input open: when it is gone, so are we.
  process.stdin.on('end', () => void close())
  process.stdin.resume()
}
