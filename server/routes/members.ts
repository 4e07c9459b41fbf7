import * as contract from '#shared/contracts/members.ts'
import { AppError } from '../errors.ts'
import * as members from '../services/members.ts'
import { openShop } from '../services/people.ts'
import type { Binder } from './binder.ts'
import { sessionAnswer, startSession } from './session.ts'

export function memberRoutes(binder: Binder): void {
  const { dependencies } = binder

  binder.implement(contract.createShop, async call => {
    if (call.actor === null) throw new AppError('sign-in-required', { detail: 'Sign in first.' })
    await openShop(dependencies, call.actor, call.body.name)
    return sessionAnswer(dependencies, call.request, call.response)
  })
  binder.implementInShop(contract.getShop, ({ actor }) => members.shopOf(dependencies, actor))
  binder.implementInShop(contract.renameShop, ({ actor, body, baseVersion }) => members.renameShop(dependencies, actor, { name: body.name, baseVersion }))
  binder.implementInShop(contract.listMembers, async ({ actor }) => ({ items: await members.membersOf(dependencies, actor) }))
  binder.implementInShop(contract.changeMemberRole, ({ actor, params, body }) => members.changeRole(dependencies, actor, { userId: params.userId, role: body.role }))
  binder.implementInShop(contract.removeMember, ({ actor, params }) => members.removeMember(dependencies, actor, params.userId))
  binder.implementInShop(contract.listInvitations, async ({ actor }) => ({ items: await members.invitationsOf(dependencies, actor) }))
  binder.implementInShop(contract.createInvitation, ({ actor, body }) => members.invite(dependencies, actor, body))
  binder.implementInShop(contract.revokeInvitation, ({ actor, params }) => members.revokeInvitation(dependencies, actor, params.invitationId))
  binder.implement(contract.lookUpInvitation, ({ body }) => members.lookUpInvitation(dependencies, body.token))

  binder.implement(contract.acceptInvitation, async call => {
    const userId = await members.acceptInvitation(dependencies, { ...call.body, signedInAs: call.actor?.userId ?? null })
    if (call.actor === null) await startSession(call.request, userId)
    return sessionAnswer(dependencies, call.request, call.response)
  })
}
