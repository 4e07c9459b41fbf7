import connectPgSimple from 'connect-pg-simple'
import type { RequestHandler } from 'express'
import session from 'express-session'
import type pg from 'pg'
import type { Config } from '../config.ts'

declare module 'express-session' {
  interface SessionData {
    userId: string
    /** Day (UTC) on which the expiry was last moved: at most one write a day instead of one a request. */
    touchedOn: string
  }
}

export const sessionDays = 30
export const sessionCookieName = 'fanlight.sid'

/** Sessions are kept by the real clock, as their store keeps them. */
export const dayInUtc = (): string => new Date().toISOString().slice(0, 10)

/** Sessions live in PostgreSQL, so that any server knows them; only signed-in people have one. */
export function sessionMiddleware(config: Config, pool: pg.Pool): RequestHandler[] {
  const Store = connectPgSimple(session)
  const keep = session({
    store: new Store({ pool, tableName: 'session', createTableIfMissing: false, disableTouch: true, pruneSessionInterval: 3600 }),
    name: sessionCookieName,
    secret: config.sessionSecret,
    resave: false,
    // Whether the visitor came by HTTPS is said by the proxy in front of us, if there is one.
    ...(config.secureCookies ? { proxy: true } : {}),
    saveUninitialized: false,
    cookie: { httpOnly: true, sameSite: 'lax', secure: config.secureCookies, maxAge: sessionDays * 86_400_000 },
  })
  const prolong: RequestHandler = (request, _response, next) => {
    if (request.session.userId !== undefined) {
      const today = dayInUtc()
      // Setting a field marks the session as changed: saved with a new expiry.
      if (request.session.touchedOn !== today) request.session.touchedOn = today
    }
    next()
  }
  return [keep, prolong]
}
