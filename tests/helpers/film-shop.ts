import { createHmac, randomBytes } from 'node:crypto'
import { createServer, type Server } from 'node:http'
import { pino } from 'pino'
import { v7 } from 'uuid'
import { membership, pairing, printer, resin, session, shop, study, user } from '#db/schema/index.ts'
import { createApp } from '#server/app.ts'
import { readConfig } from '#server/config.ts'
import type { Role } from '#shared/contracts/common.ts'
import type { FilmReadingSave } from '#shared/contracts/film.ts'
import type { FilmImportMapping } from '#shared/contracts/film-imports.ts'
import { defaultFilmSettings } from '#shared/contracts/studies.ts'
import { createTestDatabase } from './test-database.ts'

const secret = 'a secret for tests, thirty-two characters long'

interface Sent {
  readonly body?: unknown
  readonly headers?: Readonly<Record<string, string>>
}

/** A signed-in browser of one person. */
export interface FilmClient {
  readonly userId: string
  /** Cookies and token of the session, for calls that `send` cannot make. */
  readonly headers: Readonly<Record<string, string>>
  /** Sends JSON, or bytes and text as they are. */
  send(method: string, path: string, sent?: Sent): Promise<Response>
}

/** A listening server with one shop, one pairing and one study in seconds. */
export async function startFilmShop() {
  const { database: db, pool, url, drop } = await createTestDatabase()
  const config = readConfig({ DATABASE_URL: url, NODE_ENV: 'test', SESSION_SECRET: secret, LOG_LEVEL: 'silent' })
  const app = createApp({
    config, database: db, pool, logger: pino({ level: process.env.FILM_LOG ?? 'silent' }),
    mailQueue: { enqueue: async () => {} }, mailbox: null, demoSignIns: [], clock: () => new Date(), newId: () => v7(),
  })
  const server: Server = createServer(app)
  await new Promise<void>(resolve => server.listen(0, '127.0.0.1', resolve))
  const address = server.address()
  if (address === null || typeof address === 'string') throw new Error('the server does not listen on a port')
  const baseUrl = `http://127.0.0.1:${address.port}`

  async function makeShop() {
    const ids = { shopId: v7(), printerId: v7(), resinId: v7(), pairingId: v7() }
    const { shopId } = ids
    await db.insert(shop).values({ id: shopId, name: 'Testing shop' })
    await db.insert(printer).values({
      id: ids.printerId, shopId, name: 'Bench', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: 50, plateWidthMillimetres: 120, plateDepthMillimetres: 70,
      exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60,
    })
    await db.insert(resin).values({ id: ids.resinId, shopId, name: 'Grey' })
    await db.insert(pairing).values({ id: ids.pairingId, shopId, printerId: ids.printerId, resinId: ids.resinId })
    return ids
  }

  async function makeStudy(ids: { shopId: string; pairingId: string }, exposureKind: 'seconds' | 'mJ/cm2' = 'seconds') {
    const studyId = v7()
    await db.insert(study).values({ id: studyId, shopId: ids.shopId, pairingId: ids.pairingId, name: `Study ${studyId}`, layerHeightMicrometres: 50, exposureKind, film: defaultFilmSettings })
    return { shopId: ids.shopId, studyId, path: `/api/shops/${ids.shopId}/studies/${studyId}` }
  }

  /** Signs a new member in, as the session middleware would have stored it. */
  async function signIn(shopId: string, role: Role, displayName = `The ${role}`): Promise<FilmClient> {
    const userId = v7()
    await db.insert(user).values({ id: userId, email: `${userId}@quillmere.example`, displayName, passwordHash: 'none' })
    await db.insert(membership).values({ shopId, userId, role })
    const sid = randomBytes(24).toString('base64url')
    const expire = new Date(Date.now() + 86_400_000)
    await db.insert(session).values({ sid, sess: { cookie: { expires: expire.toISOString(), originalMaxAge: 86_400_000, httpOnly: true, path: '/' }, userId, touchedOn: new Date().toISOString().slice(0, 10) }, expire })
    const signature = createHmac('sha256', secret).update(sid).digest('base64').replace(/=+$/, '')
    const csrfCookie = randomBytes(32).toString('hex')
    const csrfToken = createHmac('sha256', secret).update(`csrf:${csrfCookie}:${sid}`).digest('hex')
    const sessionHeaders = { Cookie: `fanlight.sid=${encodeURIComponent(`s:${sid}.${signature}`)}; fanlight.csrf=${csrfCookie}`, 'X-CSRF-Token': csrfToken }
    return {
      userId,
      headers: sessionHeaders,
      send(method, path, { body: given, headers } = {}) {
        const body = given instanceof Uint8Array ? new Blob([new Uint8Array(given)]) : given
        const raw = body === undefined || typeof body === 'string' || body instanceof Blob || body instanceof ReadableStream
        return fetch(`${baseUrl}${path}`, {
          method,
          headers: {
            ...sessionHeaders, ...(raw ? {} : { 'Content-Type': 'application/json' }), ...headers,
          },
          ...(body === undefined ? {} : { body: raw ? body : JSON.stringify(body) }),
          ...(body instanceof ReadableStream ? { duplex: 'half' as const } : {}),
        })
      },
    }
  }

  return {
    baseUrl, db, pool, databaseUrl: url, makeShop, makeStudy, signIn,
    async close() {
      server.closeAllConnections()
      await new Promise(resolve => server.close(resolve))
      await drop()
    },
  }
}
export type FilmShop = Awaited<ReturnType<typeof startFilmShop>>

/** A new cell as the entry grid sends it. */
export const cell = (changes: Partial<FilmReadingSave> = {}): FilmReadingSave => ({
  id: v7(), exposure: 1.7, exposureText: '1.7', replicate: 1, depthMicrometres: 430, depthText: '0.43', standardUncertaintyMicrometres: null,
  state: 'measured', exclusionReason: null, note: '', baseVersion: null, withdrawn: false, ...changes,
})

/** Comma, point, header in one row, exposure in s, thickness in mm. */
export const plainImportMapping: FilmImportMapping = {
  encoding: 'utf-8', delimiter: ',', decimalMark: '.', headerRows: 1, exposure: { column: 0, unit: 's' }, depth: { column: 1, unit: 'mm' },
  state: null, uncertainty: null, replicate: null, note: null, substrateThicknessMicrometres: 0,
}

/** Address of an import. */
export function importPath(studyPath: string, batchId: string, mapping: unknown = plainImportMapping, more: Readonly<Record<string, string>> = {}): string {
  const query = new URLSearchParams({ fileName: 'films.csv', mapping: typeof mapping === 'string' ? mapping : JSON.stringify(mapping), ...more })
  return `${studyPath}/film-imports/${batchId}?${query}`
}
export const csvHeaders = { 'Content-Type': 'text/csv' } as const
