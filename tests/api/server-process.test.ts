import { connect, createServer } from 'node:net'
import { setTimeout as wait } from 'node:timers/promises'
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest'
import { demoPeople } from '#db/seed/index.ts'
import { startFakeMailServer, type FakeMailServer } from '#server/mail/mailbox.ts'
import { arriveAsVisitor, postAsVisitor, startServerProcess, type ServerProcess } from '#tests/helpers/server-process.ts'
import { createTestDatabase, type TestDatabase } from '#tests/helpers/test-database.ts'

let database: TestDatabase
let mailServer: FakeMailServer
const processes: ServerProcess[] = []
beforeAll(async () => {
  database = await createTestDatabase()
  mailServer = await startFakeMailServer(() => new Date())
})
afterEach(async () => {
  await Promise.all(processes.splice(0).map(one => one.end('SIGKILL')))
})
afterAll(async () => {
  await mailServer.close()
  await database.drop()
})

async function start(environment: Readonly<Record<string, string>> = {}, onLog?: (log: string) => void): Promise<ServerProcess> {
  const one = await startServerProcess({ DATABASE_URL: database.url, ...environment }, onLog)
  processes.push(one)
  return one
}
const signUpOf = (email: string) => ({ email, displayName: 'Nell', shopName: 'Shop', password: 'a lamp and a lens' })
const signUp = (server: ServerProcess, email: string) => postAsVisitor(server.ready.url, '/api/sign-ups', signUpOf(email))
async function untilMailTo(email: string, seconds: number) {
  for (let i = 0; i < seconds * 20; i++) {
    const found = (await mailServer.list()).filter(mail => mail.to.includes(email))
    if (found.length > 0) return found
    await wait(50)
  }
  throw new Error(`no mail to ${email} after ${seconds} s`)
}
async function closedPort(): Promise<number> {
  const probe = createServer()
  await new Promise<void>(resolve => probe.listen(0, '127.0.0.1', resolve))
  const address = probe.address()
  await new Promise(resolve => probe.close(resolve))
  return typeof address === 'object' && address !== null ? address.port : 0
}

describe('a server that is killed', () => {
  it('between a change and its mail loses nothing: the next one sends the mail', async () => {
    const first = await start({ SMTP_URL: mailServer.smtpUrl })
    const email = 'killed-at-once@quillmere.example'
    // The answer comes with the commit; the mail leaves at the next look at the queue, up to a second later.
    expect((await signUp(first, email)).status).toBe(202)
    expect(await first.end('SIGKILL')).toBe('SIGKILL')
    await start({ SMTP_URL: mailServer.smtpUrl })
    expect(await untilMailTo(email, 20)).toHaveLength(1)
  })

  it('while the mail server is down loses nothing either', async () => {
    const first = await start({ SMTP_URL: `smtp://127.0.0.1:${await closedPort()}` })
    const email = 'killed-later@quillmere.example'
    expect((await signUp(first, email)).status).toBe(202)
    for (let i = 0; i < 100 && !first.log().includes('tried again'); i++) await wait(50)
    expect(first.log()).toContain('tried again')
    await first.end('SIGKILL')
    await start({ SMTP_URL: mailServer.smtpUrl })
    expect(await untilMailTo(email, 30)).toHaveLength(1)
  })
})

describe('a server that is asked to close', () => {
  it.each(['SIGTERM', 'SIGINT'] as const)('by %s finishes the answer under way, closes idle connections and ends with 0', async signal => {
    const server = await start()
    await fetch(`${server.ready.url}/api/session`)
    const visitors = await Promise.all(Array.from({ length: 8 }, () => arriveAsVisitor(server.ready.url)))
    const answers = visitors.map((post, i) => post('/api/sign-ups', signUpOf(`closing-${signal}-${i}@quillmere.example`)))
    // Hashing passwords takes long enough that all have arrived and most are under way when the first is answered.
    await Promise.race(answers)
    const began = Date.now()
    const code = await server.end(signal)
    expect(code).toBe(0)
    expect(Date.now() - began).toBeLessThan(9_000)
    for (const answer of await Promise.allSettled(answers)) {
      // Begun before: answered whole. Not begun: refused by a closed port, never cut off half-way.
      if (answer.status === 'fulfilled') expect(answer.value.status).toBe(202)
      else expect(String(answer.reason.cause?.code)).toBe('ECONNREFUSED')
    }
    await expect(fetch(server.ready.url)).rejects.toThrow()
  })

  it('ends within ten seconds even when somebody never finishes a request', async () => {
    const server = await start()
    const { port } = new URL(server.ready.url)
    const socket = connect(Number(port), '127.0.0.1')
    socket.on('error', () => {})
    await new Promise<void>(resolve => socket.once('connect', resolve))
    socket.write('GET /api/session HTTP/1.1\r\nHost: x\r\nX-Never')
    await wait(100)
    const began = Date.now()
    await server.end('SIGTERM')
    expect(Date.now() - began).toBeLessThan(12_000)
    socket.destroy()
  })

  it('ends when whoever started it is gone', async () => {
    const server = await start()
    server.child.stdin?.end()
    expect(await new Promise(resolve => server.child.once('exit', resolve))).toBe(0)
  })
})

describe('a server whose database goes away and comes back', () => {
  it('stays up, answers 503 or well, and answers well again; mail leaves again', async () => {
    const server = await start({ SMTP_URL: mailServer.smtpUrl })
    for (let round = 0; round < 10; round++) {
      await database.pool.query('select pg_terminate_backend(pid) from pg_stat_activity where datname = current_database() and pid <> pg_backend_pid()')
      expect([200, 503]).toContain((await fetch(`${server.ready.url}/api/health`)).status)
      await wait(50)
    }
    expect((await fetch(`${server.ready.url}/api/health`)).status).toBe(200)
    const email = 'after-the-cut@quillmere.example'
    expect((await signUp(server, email)).status).toBe(202)
    await untilMailTo(email, 20)
    expect(server.child.exitCode).toBeNull()
  })

  it('waits at its start for a database that does not answer yet', async () => {
    const port = await closedPort()
    const target = new URL(database.url)
    const late = new URL(database.url)
    late.port = String(port)
    let hasLooked = () => {}
    const looked = new Promise<void>(resolve => (hasLooked = resolve))
    const starting = start({ DATABASE_URL: late.toString() }, log => {
      if (log.includes('does not answer yet')) hasLooked()
    })
    await looked
    // PostgreSQL "comes up": a port that leads to the real one.
    const bridge = createServer(socket => {
      const upstream = connect(Number(target.port), target.hostname)
      for (const one of [socket, upstream]) one.on('error', () => {})
      socket.pipe(upstream).pipe(socket)
    })
    await new Promise<void>(resolve => bridge.listen(port, '127.0.0.1', resolve))
    const server = await starting
    expect((await fetch(`${server.ready.url}/api/health`)).status).toBe(200)
    expect(server.log()).toContain('does not answer yet')
    await server.end('SIGKILL')
    bridge.close()
  })

  it('says at once what is wrong with a setting, and starts nothing', async () => {
    await expect(start({ DATABASE_URL: 'mysql://elsewhere/x' })).rejects.toThrow(/DATABASE_URL/)
  })
})

describe('the demo shop', () => {
  it('is announced with its sign-ins, which work', async () => {
    const server = await start({ DEMO_SHOP: 'yes' })
    expect(server.ready.demo).toEqual(demoPeople.map(({ email, password, role }) => ({ email, password, role })))
    for (const { email, password } of server.ready.demo) {
      expect((await postAsVisitor(server.ready.url, '/api/session', { email, password })).status).toBe(200)
    }
    await server.end('SIGTERM')
    const again = await start({ DEMO_SHOP: 'yes' })
    expect(again.ready.demo).toEqual(server.ready.demo)
  })
})
