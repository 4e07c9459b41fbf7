import type { Request, Response } from 'express'
import type { Session } from '#shared/contracts/session.ts'
import * as contract from '#shared/contracts/session.ts'
import type { Dependencies } from '../dependencies.ts'
import { dayInUtc, sessionCookieName } from '../middleware/session.ts'
import { issueCsrfToken } from '../middleware/csrf.ts'
import { rateLimitCaller } from '../middleware/rate-limit.ts'
import * as people from '../services/people.ts'
import { describeSession } from '../services/session-view.ts'
import type { Binder } from './binder.ts'

/** Signs a person in with a session id that nobody could have known before. */
export async function startSession(request: Request, userId: string): Promise<void> {
  await new Promise<void>((resolve, reject) => request.session.regenerate(error => (error ? reject(error) : resolve())))
  request.session.userId = userId
  request.session.touchedOn = dayInUtc()
  await new Promise<void>((resolve, reject) => request.session.save(error => (error ? reject(error) : resolve())))
}

/** What every session call answers. */
export async function sessionAnswer(dependencies: Dependencies, request: Request, response: Response): Promise<Session> {
  const view = await describeSession(dependencies, request.session.userId ?? null)
  return { csrfToken: issueCsrfToken(dependencies.config, request, response), ...view }
}

export function sessionRoutes(binder: Binder): void {
  const { dependencies } = binder
  const answer = (call: { request: Request; response: Response }) => sessionAnswer(dependencies, call.request, call.response)

  binder.implement(contract.getSession, answer)

  binder.implement(contract.signIn, async call => {
    await startSession(call.request, await people.checkSignIn(dependencies, call.body))
    await binder.rateLimits.forgive(contract.signIn.id, rateLimitCaller(call))
    return answer(call)
  })

  binder.implement(contract.signOut, async call => {
    // A new empty session, which is never stored: the old one is gone from the database.
    await new Promise<void>((resolve, reject) => call.request.session.regenerate(error => (error ? reject(error) : resolve())))
    call.response.clearCookie(sessionCookieName)
    return answer(call)
  })

  binder.implement(contract.signUp, async ({ body }) => {
    await people.beginSignUp(dependencies, body)
    return { sentTo: body.email }
  })

  binder.implement(contract.confirmSignUp, async call => {
    await startSession(call.request, await people.confirmSignUp(dependencies, call.body.token))
    return answer(call)
  })

  binder.implement(contract.requestPasswordReset, async ({ body }) => {
    await people.beginPasswordReset(dependencies, body.email)
    return { sentTo: body.email }
  })

  binder.implement(contract.completePasswordReset, async ({ body }) => {
    await people.finishPasswordReset(dependencies, body)
  })

  binder.implement(contract.updateAccount, async call => {
    if (call.actor !== null) await people.renamePerson(dependencies, call.actor.userId, call.body.displayName)
    return answer(call)
  })

  binder.implement(contract.changePassword, async call => {
    if (call.actor !== null) {
      await people.changeOwnPassword(dependencies, { userId: call.actor.userId, sessionId: call.request.sessionID, ...call.body })
    }
    return answer(call)
  })
}
