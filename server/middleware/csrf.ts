import { createHmac, randomBytes, timingSafeEqual } from 'node:crypto'
import type { Request, RequestHandler, Response } from 'express'
import type { Config } from '../config.ts'
import { AppError } from '../errors.ts'

const cookieName = 'fanlight.csrf'
const safeMethods = new Set(['GET', 'HEAD', 'OPTIONS'])

function cookieValue(request: Request): string | null {
  for (const part of (request.headers.cookie ?? '').split(';')) {
    const [name, value] = part.trim().split('=')
    if (name === cookieName && value !== undefined && /^[0-9a-f]{64}$/.test(value)) return value
  }
  return null
}

/** Bound to the browser's cookie and to the session: signing in makes former tokens useless. */
function tokenFor(secret: string, cookie: string, request: Request): string {
  const signedInAs = request.session.userId === undefined ? 'nobody' : request.sessionID
  return createHmac('sha256', secret).update(`csrf:${cookie}:${signedInAs}`).digest('hex')
}

/** The token for this browser; makes the cookie where there is none yet. */
export function issueCsrfToken(config: Config, request: Request, response: Response): string {
  let cookie = cookieValue(request)
  if (cookie === null) {
    cookie = randomBytes(32).toString('hex')
    response.cookie(cookieName, cookie, { httpOnly: true, sameSite: 'lax', secure: config.secureCookies, path: '/' })
  }
  return tokenFor(config.sessionSecret, cookie, request)
}

/** No Origin header: not a browser, which the token below still stops. "null" is a page that hides where it is from. */
function isOwnOrigin(config: Config, request: Request): boolean {
  const { origin, host } = request.headers
  if (origin === undefined) return true
  return URL.canParse(origin) && (new URL(origin).host === host || origin === new URL(config.publicUrl).origin)
}

/** In a time that does not tell how far two texts agree. */
function sameText(given: string, expected: string): boolean {
  const [a, b] = [Buffer.from(given), Buffer.from(expected)]
  return a.length === b.length && timingSafeEqual(a, b)
}

/** Refuses writes that do not carry the token, or that come from a page of another origin. */
export function csrfProtection(config: Config): RequestHandler {
  return (request, _response, next) => {
    if (safeMethods.has(request.method)) return next()
    if (!isOwnOrigin(config, request)) {
      throw new AppError('csrf-token-missing', { detail: 'This call came from a page of another address and was refused.' })
    }
    const cookie = cookieValue(request)
    const given = request.get('X-CSRF-Token') ?? ''
    const expected = cookie === null ? '' : tokenFor(config.sessionSecret, cookie, request)
    if (expected === '' || !sameText(given, expected)) {
      throw new AppError('csrf-token-missing', { detail: 'The page is out of date with its session. Reload it; what you typed is kept.' })
    }
    next()
  }
}
