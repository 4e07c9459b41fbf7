import { createServer } from 'node:net'
import { setTimeout as wait } from 'node:timers/promises'
import nodemailer from 'nodemailer'
import { pino } from 'pino'
import { sql } from 'drizzle-orm'
import { afterEach, beforeAll, afterAll, describe, expect, it } from 'vitest'
import { startMailQueue, type RunningMailQueue } from '#server/jobs/mail-queue.ts'
import { startFakeMailServer, type FakeMailServer } from '#server/mail/mailbox.ts'
import { invitationMail } from '#server/mail/texts.ts'
import { createTestDatabase, type TestDatabase } from '#tests/helpers/test-database.ts'

let database: TestDatabase
let mailServer: FakeMailServer
const log: string[] = []
const logger = pino({ level: 'debug' }, { write: line => void log.push(line) })
const running: RunningMailQueue[] = []
beforeAll(async () => {
  database = await createTestDatabase()
  mailServer = await startFakeMailServer(() => new Date('2026-03-10T09:00:00Z'))
})
afterEach(async () => {
  await Promise.all(running.splice(0).map(queue => queue.stop()))
})
afterAll(async () => {
  await mailServer.close()
  await database.drop()
})

async function start(options: { smtpUrl?: string; pollingMilliseconds?: number; retryDelaySeconds?: number } = {}): Promise<RunningMailQueue> {
  const queue = await startMailQueue({
    databaseUrl: database.url, smtpUrl: mailServer.smtpUrl, from: 'Fanlight <fanlight@quillmere.example>', logger, pollingMilliseconds: 20, retryDelaySeconds: 1, ...options,
  })
  running.push(queue)
  return queue
}
let count = 0
const mail = (text = 'Hello,\n\nhttps://fanlight.test/reset/new?token=secret-token') => ({ to: `reader-${++count}@quillmere.example`, subject: `Mail ${count}`, text })
const arrived = async (to: string) => (await mailServer.list()).filter(one => one.to.includes(to))
async function untilArrived(to: string, seconds = 10) {
  for (let i = 0; i < seconds * 50; i++) {
    const found = await arrived(to)
    if (found.length > 0) return found
    await wait(20)
  }
  throw new Error(`no mail to ${to} after ${seconds} s`)
}
const jobs = async (to: string) => (await database.database.execute(sql`select state from pgboss.job where data->>'to' = ${to} union all select state from pgboss.archive where data->>'to' = ${to}`)).rows

describe('a mail', () => {
  it('arrives with sender, subject, text and links, and leaves nothing of its text in the database', async () => {
    const queue = await start()
    const sent = mail()
    await queue.enqueue(sent)
    const [found] = await untilArrived(sent.to)
    expect(found).toMatchObject({
      from: '"Fanlight" <fanlight@quillmere.example>', to: [sent.to], subject: sent.subject, links: ['https://fanlight.test/reset/new?token=secret-token'], caughtAt: '2026-03-10T09:00:00.000Z',
    })
    expect(found?.text.trim()).toBe(sent.text)
    await wait(100)
    expect(await jobs(sent.to)).toEqual([])
  })

  it('leaves only if the transaction that enqueued it commits', async () => {
    const queue = await start()
    const [kept, dropped] = [mail(), mail()]
    await database.database.transaction(transaction => queue.enqueue(kept, transaction))
    await expect(database.database.transaction(async transaction => {
      await queue.enqueue(dropped, transaction)
      throw new Error('the change failed')
    })).rejects.toThrow('the change failed')
    await untilArrived(kept.to)
    await wait(200)
    expect(await arrived(dropped.to)).toEqual([])
    expect(await jobs(dropped.to)).toEqual([])
  })

  it('is not seen before the commit', async () => {
    const queue = await start()
    const sent = mail()
    await database.database.transaction(async transaction => {
      await queue.enqueue(sent, transaction)
      await wait(200)
      expect(await arrived(sent.to)).toEqual([])
    })
    await untilArrived(sent.to)
  })

  it('that a server took on and could not send before it died is sent by the next one', async () => {
    // Looks for mail once at its start and then not for an hour: as good as dead.
    const dying = await start({ pollingMilliseconds: 3_600_000 })
    await wait(100)
    const sent = mail()
    await database.database.transaction(transaction => dying.enqueue(sent, transaction))
    expect(await arrived(sent.to)).toEqual([])
    await start()
    expect(await untilArrived(sent.to)).toHaveLength(1)
  })

  it('waits while the mail server is down and arrives when it is back; the log has neither text nor link', async () => {
    const port = await freePort()
    const queue = await start({ smtpUrl: `smtp://127.0.0.1:${port}` })
    const sent = mail()
    await queue.enqueue(sent)
    await wait(400)
    expect(await jobs(sent.to)).toEqual([{ state: 'retry' }])
    expect(log.join('')).toContain('tried again')
    expect(log.join('')).not.toMatch(/secret-token|reader-/)
    await Promise.all(running.splice(0).map(one => one.stop()))
    await start()
    expect(await untilArrived(sent.to, 20)).toHaveLength(1)
  })

  it('that nobody takes does not hold up the ones after it', async () => {
    const queue = await start()
    const bad = { ...mail(), to: 'no address at all' }
    const good = mail()
    await queue.enqueue(bad)
    await queue.enqueue(good)
    await untilArrived(good.to)
    await database.database.execute(sql`delete from pgboss.job`)
  })

  it('is sent once by three servers that start at the same moment and empty one queue', async () => {
    const fresh = await createTestDatabase()
    const queues = await Promise.all([1, 2, 3].map(() => startMailQueue({ databaseUrl: fresh.url, smtpUrl: mailServer.smtpUrl, from: 'f@quillmere.example', logger, pollingMilliseconds: 10 })))
    const mails = Array.from({ length: 40 }, () => mail())
    await Promise.all(mails.map((one, i) => queues[i % 3]?.enqueue(one)))
    for (const one of mails) await untilArrived(one.to)
    await wait(200)
    for (const one of mails) expect(await arrived(one.to)).toHaveLength(1)
    await Promise.all(queues.map(queue => queue.stop()))
    await fresh.drop()
  })

  it('still leaves after PostgreSQL cut every connection', async () => {
    const queue = await start()
    for (let round = 0; round < 3; round++) {
      await cutConnections()
      await wait(50)
    }
    const sent = mail()
    await enqueueOnceReachable(queue, sent)
    await untilArrived(sent.to)
  })

  it('to a name with line breaks has one subject and one receiver', async () => {
    const queue = await start()
    const to = mail().to
    await queue.enqueue(invitationMail(to, { shopName: 'Bench\r\nBcc: victim@quillmere.example', invitedBy: 'Ada\nSubject: other', role: 'viewer', link: 'https://fanlight.test/invitation?token=x' }))
    const [found] = await untilArrived(to)
    expect(found?.to).toEqual([to])
    expect(found?.subject).toBe('Invitation to the shop Bench Bcc: victim@quillmere.example')
    expect(await arrived('victim@quillmere.example')).toEqual([])
  })
})

describe('the mailbox', () => {
  it('shows the newest first and keeps the last two hundred', async () => {
    const box = await startFakeMailServer(() => new Date())
    const transport = nodemailer.createTransport({ url: box.smtpUrl, pool: true, maxConnections: 1, maxMessages: Infinity })
    for (let i = 0; i < 205; i++) await transport.sendMail({ from: 'f@quillmere.example', to: 'box@quillmere.example', subject: `Number ${i}`, text: 'x' })
    transport.close()
    const subjects = (await box.list()).map(one => one.subject)
    expect(subjects).toHaveLength(200)
    expect(subjects[0]).toBe('Number 204')
    expect(subjects[199]).toBe('Number 5')
    await box.close()
  })
})

const cutConnections = () => database.pool.query('select pg_terminate_backend(pid) from pg_stat_activity where datname = current_database() and pid <> pg_backend_pid()')
async function enqueueOnceReachable(queue: RunningMailQueue, sent: { to: string; subject: string; text: string }): Promise<void> {
  for (let attempt = 0; ; attempt++) {
    try {
      return await queue.enqueue(sent)
    } catch (error) {
      if (attempt === 5) throw error
    }
  }
}
async function freePort(): Promise<number> {
  const probe = createServer()
  await new Promise<void>(resolve => probe.listen(0, '127.0.0.1', resolve))
  const address = probe.address()
  await new Promise(resolve => probe.close(resolve))
  return typeof address === 'object' && address !== null ? address.port : 0
}
