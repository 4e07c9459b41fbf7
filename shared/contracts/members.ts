import { z } from 'zod'
import { emailSchema, idSchema, instantSchema, nameSchema, newPasswordSchema, roleSchema, shopParamsSchema } from './common.ts'
import { operation } from './operation.ts'
import { sessionSchema } from './session.ts'

export const shopSchema = z.object({
  id: idSchema,
  name: z.string(),
  demo: z.boolean(),
  version: z.int(),
  createdAt: instantSchema,
})
export type Shop = z.infer<typeof shopSchema>

export const memberSchema = z.object({
  userId: idSchema,
  displayName: z.string(),
  email: z.string(),
  role: roleSchema,
  joinedAt: instantSchema,
})
export type Member = z.infer<typeof memberSchema>

export const invitationSchema = z.object({
  id: idSchema,
  email: z.string(),
  role: roleSchema,
  invitedBy: z.string(),
  createdAt: instantSchema,
  expiresAt: instantSchema,
})
export type Invitation = z.infer<typeof invitationSchema>

const tokenSchema = z.string().min(20).max(200)

export const createShop = operation({
  id: 'createShop',
  method: 'post',
  path: '/api/shops',
  summary: 'Make a shop of one’s own; the maker is its owner',
  body: z.strictObject({ name: nameSchema }),
  response: sessionSchema,
  status: 201,
})

export const getShop = operation({
  id: 'getShop',
  method: 'get',
  path: '/api/shops/:shopId',
  summary: 'One shop',
  params: shopParamsSchema,
  response: shopSchema,
  status: 200,
})

export const renameShop = operation({
  id: 'renameShop',
  method: 'patch',
  path: '/api/shops/:shopId',
  summary: 'Rename a shop',
  params: shopParamsSchema,
  body: z.strictObject({ name: nameSchema }),
  response: shopSchema,
  status: 200,
  versioned: true,
})

export const listMembers = operation({
  id: 'listMembers',
  method: 'get',
  path: '/api/shops/:shopId/members',
  summary: 'The people of a shop',
  params: shopParamsSchema,
  response: z.object({ items: z.array(memberSchema) }),
  status: 200,
})

export const changeMemberRole = operation({
  id: 'changeMemberRole',
  method: 'patch',
  path: '/api/shops/:shopId/members/:userId',
  summary: 'Give a member another role; a shop keeps at least one owner',
  params: shopParamsSchema.extend({ userId: idSchema }),
  body: z.strictObject({ role: roleSchema }),
  response: memberSchema,
  status: 200,
})

export const removeMember = operation({
  id: 'removeMember',
  method: 'delete',
  path: '/api/shops/:shopId/members/:userId',
  summary: 'Remove a member (or leave); a shop keeps at least one owner',
  params: shopParamsSchema.extend({ userId: idSchema }),
  status: 204,
})

export const listInvitations = operation({
  id: 'listInvitations',
  method: 'get',
  path: '/api/shops/:shopId/invitations',
  summary: 'Invitations not yet accepted',
  params: shopParamsSchema,
  response: z.object({ items: z.array(invitationSchema) }),
  status: 200,
})

export const createInvitation = operation({
  id: 'createInvitation',
  method: 'post',
  path: '/api/shops/:shopId/invitations',
  summary: 'Invite a person by e-mail with a role; an open invitation to the same address is replaced',
  params: shopParamsSchema,
  body: z.strictObject({ email: emailSchema, role: roleSchema }),
  response: invitationSchema,
  status: 201,
})

export const revokeInvitation = operation({
  id: 'revokeInvitation',
  method: 'delete',
  path: '/api/shops/:shopId/invitations/:invitationId',
  summary: 'Take an invitation back',
  params: shopParamsSchema.extend({ invitationId: idSchema }),
  status: 204,
})

/** POST, so that the token stands in no log. */
export const lookUpInvitation = operation({
  id: 'lookUpInvitation',
  method: 'post',
  path: '/api/invitations/look-up',
  summary: 'What an invitation from a mail offers',
  body: z.strictObject({ token: tokenSchema }),
  response: z.object({ shopName: z.string(), email: z.string(), role: roleSchema, hasAccount: z.boolean() }),
  status: 200,
})

/** New people give name and password; known ones sign in first and give neither. */
export const acceptInvitation = operation({
  id: 'acceptInvitation',
  method: 'post',
  path: '/api/invitations/accept',
  summary: 'Accept an invitation',
  body: z.strictObject({
    token: tokenSchema,
    newPerson: z.strictObject({ displayName: nameSchema, password: newPasswordSchema }).optional(),
  }),
  response: sessionSchema,
  status: 200,
})
