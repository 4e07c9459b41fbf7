import { v7 } from 'uuid'
import { membership, pairing, printer, resin, shop, study } from '#db/schema/index.ts'
import type { Role } from '#shared/contracts/common.ts'
import type { FilmReadingSave } from '#shared/contracts/film.ts'
import type { FilmImportMapping } from '#shared/contracts/film-imports.ts'
import { getSession, sessionSchema, signIn as signInOperation } from '#shared/contracts/session.ts'
import { defaultFilmSettings } from '#shared/contracts/studies.ts'
import { startTestApp, testPassword } from './test-app.ts'

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
  const app = await startTestApp()
  const { database: db, pool, server } = app
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

  /** A new member, signed in: with fetch rather than an agent, because files are streamed. */
  async function signIn(shopId: string, role: Role, displayName = `The ${role}`): Promise<FilmClient> {
    const { userId, email } = await app.makePerson(displayName)
    await db.insert(membership).values({ shopId, userId, role })
    const cookies = new Map<string, string>()
    let csrfToken = ''
    const headersNow = () => ({ Cookie: [...cookies].map(([name, value]) => `${name}=${value}`).join('; '), 'X-CSRF-Token': csrfToken })
    const take = async (response: Response) => {
      for (const line of response.headers.getSetCookie()) {
        const [, name = '', value = ''] = /^([^=]+)=([^;]*)/.exec(line) ?? []
        cookies.set(name, value)
      }
      csrfToken = sessionSchema.parse(await response.json()).csrfToken
    }
    await take(await fetch(`${baseUrl}${getSession.path}`))
    await take(await fetch(`${baseUrl}${signInOperation.path}`, {
      method: signInOperation.method.toUpperCase(), headers: { ...headersNow(), 'Content-Type': 'application/json' }, body: JSON.stringify({ email, password: testPassword }),
    }))
    const sessionHeaders = headersNow()
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
    baseUrl, db, pool, databaseUrl: app.url, makeShop, makeStudy, signIn,
    close: () => app.close(),
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
