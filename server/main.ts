import { setTimeout as wait } from 'node:timers/promises'
import { pino } from 'pino'
import { v7 } from 'uuid'
import { connectDatabase } from '#db/client.ts'
import { migrateDatabase } from '#db/migrate.ts'
import { seedDemoShop } from '#db/seed/index.ts'
import { createApp } from './app.ts'
import { readConfig } from './config.ts'
import { startCleanUp } from './jobs/clean-up.ts'
import { startMailQueue } from './jobs/mail-queue.ts'
import { startFakeMailServer } from './mail/mailbox.ts'
import { loggable } from './loggable.ts'
import { isDatabaseAway, postgresCode } from './middleware/errors.ts'
import { hashPassword } from './services/passwords.ts'

const config = readConfig(process.env)
const logger = pino({ level: config.logLevel }, pino.destination(2))
const clock = () => new Date()

// One call that went wrong unseen must not end the calls of everybody else.
process.on('unhandledRejection', error => logger.error({ err: loggable(error) }, 'unhandled rejection'))
process.on('uncaughtException', error => {
  logger.fatal({ err: loggable(error) }, 'uncaught exception')
  process.exit(1)
})

const connectTriesMax = 30

/** PostgreSQL may come up a moment after us, on this machine or another. */
async function migrateWhenReachable(): Promise<void> {
  for (let attempt = 1; ; attempt++) {
    try {
      return await migrateDatabase(config.databaseUrl)
    } catch (error) {
      // ENOTFOUND: a container whose name is not known yet.
      if (attempt === connectTriesMax || !(isDatabaseAway(error) || postgresCode(error) === 'ENOTFOUND')) throw error
      if (attempt === 1) logger.warn({ err: loggable(error) }, 'PostgreSQL does not answer yet')
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
const endCleanUp = startCleanUp({ database: connection.database, clock, logger })
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

const closeMillisecondsMax = 10_000
let closing = false
async function close(): Promise<void> {
  if (closing) return
  closing = true
  const hard = setTimeout(() => process.exit(1), closeMillisecondsMax)
  hard.unref()
  endCleanUp()
  // Answers under way are finished; connections are closed as they fall idle, so that they do not keep us.
  const idle = setInterval(() => server.closeIdleConnections(), 50)
  await new Promise<void>(resolve => server.close(() => resolve()))
  clearInterval(idle)
  for (const part of [() => mailQueue.stop(), () => mailbox?.close(), () => connection.close()]) {
    try {
      await part()
    } catch (error) {
      logger.warn({ err: loggable(error) }, 'closing')
    }
  }
  process.exit(0)
}
process.on('SIGTERM', () => void close())
process.on('SIGINT', () => void close())
if (process.env.FANLIGHT_ENDS_WITH_INPUT === 'yes') {
  // Whoever started us holds our input open: when it is gone, so are we.
  process.stdin.on('end', () => void close())
  process.stdin.resume()
}
