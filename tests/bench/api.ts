import { spawn, type ChildProcess } from 'node:child_process'
import { createInterface } from 'node:readline'
import autocannon from 'autocannon'
import { v7 } from 'uuid'
import { pairing, printer, resin, study } from '#db/schema/index.ts'
import { defaultFilmSettings } from '#shared/contracts/studies.ts'
import { startTestApp, testPassword } from '#tests/helpers/test-app.ts'
import type { BenchResult } from './types.ts'

/** Many short turns: what else runs on the machine then slows both alike. */
const rounds = 7
const secondsEach = 2
const connections = 20

/** Starts a Node script and waits for the line with which it says that it listens. */
function start(parameters: readonly string[], environment: Readonly<Record<string, string>>, marker: string): Promise<{ child: ChildProcess; line: string }> {
  const child = spawn(process.execPath, [...parameters], { env: { ...process.env, ...environment }, stdio: ['pipe', 'pipe', 'inherit'] })
  return new Promise((resolve, reject) => {
    createInterface({ input: child.stdout }).on('line', line => {
      if (line.startsWith(marker)) resolve({ child, line: line.slice(marker.length).trim() })
    })
    child.once('exit', code => reject(new Error(`${parameters.join(' ')} ended with ${code}`)))
  })
}

const stop = (child: ChildProcess): Promise<void> =>
  new Promise(resolve => {
    child.removeAllListeners('exit')
    child.once('exit', () => resolve())
    child.kill('SIGTERM')
  })

async function requestsPerSecond(url: string, headers: Record<string, string>, duration = secondsEach): Promise<number> {
  const result = await autocannon({ url, headers, connections, duration })
  if (result.non2xx > 0 || result.errors > 0) throw new Error(`${url}: ${result.non2xx} refused, ${result.errors} failed`)
  return result.requests.average
}

const median = (values: number[]): number => values.sort((a, b) => a - b)[Math.floor(values.length / 2)] ?? 0

/**
 * A study read through the API beside a bare Express and pg server that runs the same SQL: what sessions, rights,
 * parsing and the other layers cost. Both are own processes on loopback, measured in turns in one run.
 */
export async function benchApi(): Promise<BenchResult[]> {
  const app = await startTestApp()
  const { shopId, owner } = await app.makeShop()
  const ids = { printer: v7(), resin: v7(), pairing: v7(), study: v7() }
  await app.database.insert(printer).values({
    id: ids.printer, shopId, name: 'North', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 50, plateWidthMillimetres: 120, plateDepthMillimetres: 70,
    exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60,
  })
  await app.database.insert(resin).values({ id: ids.resin, shopId, name: 'Grey' })
  await app.database.insert(pairing).values({ id: ids.pairing, shopId, printerId: ids.printer, resinId: ids.resin })
  await app.database.insert(study).values({ id: ids.study, shopId, pairingId: ids.pairing, name: 'Study', layerHeightMicrometres: 50, film: defaultFilmSettings })
  const path = `/api/shops/${shopId}/studies/${ids.study}`

  // What one read asks of PostgreSQL, listened to on our own app: the bare server runs exactly that.
  const statements: { text: string; values: unknown[] }[] = []
  const { pool } = app
  const query = pool.query
  pool.query = ((first: unknown, second: unknown, third: unknown) => {
    const text = typeof first === 'string' ? first : typeof first === 'object' && first !== null && 'text' in first ? String(first.text) : ''
    const values = Array.isArray(second) ? second : typeof first === 'object' && first !== null && 'values' in first && Array.isArray(first.values) ? first.values : []
    statements.push({ text, values })
    return Reflect.apply(query, pool, third === undefined ? [first, second] : [first, second, third])
  }) as typeof query
  await owner.agent.raw.get(path).expect(200)
  statements.length = 0
  await owner.agent.raw.get(path).expect(200)
  pool.query = query
  const read = [...statements]

  const ours = await start(['--import', 'tsx', 'server/main.ts'], {
    DATABASE_URL: app.url, PORT: '0', SESSION_SECRET: app.config.sessionSecret, DEMO_SHOP: 'no', LOG_LEVEL: 'error', RATE_LIMIT_FACTOR: '1000',
  }, 'FANLIGHT_READY ')
  const bare = await start(['tests/bench/bare-server.mjs'], { BARE_SERVER: JSON.stringify({ url: app.url, statements: read }) }, 'BARE_READY ')
  try {
    const parsed: unknown = JSON.parse(ours.line)
    const oursUrl = typeof parsed === 'object' && parsed !== null && 'url' in parsed ? String(parsed.url) : ''
    const session = await fetch(`${oursUrl}/api/session`)
    const cookiesBefore = session.headers.getSetCookie().map(line => line.split(';')[0]).join('; ')
    const token: unknown = await session.json()
    const csrf = typeof token === 'object' && token !== null && 'csrfToken' in token ? String(token.csrfToken) : ''
    const signedIn = await fetch(`${oursUrl}/api/session`, {
      method: 'POST', headers: { cookie: cookiesBefore, 'x-csrf-token': csrf, 'content-type': 'application/json' }, body: JSON.stringify({ email: owner.email, password: testPassword }),
    })
    const cookie = [cookiesBefore, ...signedIn.headers.getSetCookie().map(line => line.split(';')[0])].join('; ')
    const ask = (seconds?: number) => requestsPerSecond(`${oursUrl}${path}`, { cookie }, seconds)
    const askBare = (seconds?: number) => requestsPerSecond(`http://127.0.0.1:${bare.line}/read`, {}, seconds)
    // Both are compiled and connected before anything counts.
    await askBare(3)
    await ask(3)
    const turns: { ours: number; bare: number }[] = []
    for (let round = 0; round < rounds; round++) turns.push({ bare: await askBare(), ours: await ask() })
    return [{
      name: `a study read through the API (${read.length} statements), requests/s against bare Express + pg`,
      ours: median(turns.map(turn => turn.ours)), yardstick: median(turns.map(turn => turn.bare)), unit: 'requests/s',
      ratio: median(turns.map(turn => turn.ours / turn.bare)), aim: 0.6, higherIsBetter: true,
    }]
  } finally {
    // The load's last answers may be on their way while its sockets are gone already.
    await new Promise(resolve => setTimeout(resolve, 500))
    await Promise.all([stop(ours.child), stop(bare.child)])
    await app.close()
  }
}
