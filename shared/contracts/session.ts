import { z } from 'zod'
import { emailSchema, idSchema, nameSchema, newPasswordSchema, roleSchema } from './common.ts'
import { operation } from './operation.ts'

export const userSchema = z.object({ id: idSchema, displayName: z.string(), email: z.string() })
export const membershipSchema = z.object({
  shopId: idSchema,
  shopName: z.string(),
  role: roleSchema,
  demo: z.boolean(),
})

/** Who is signed in, in which shops, and what a write must carry (`X-CSRF-Token`). */
export const sessionSchema = z.object({
  csrfToken: z.string(),
  user: userSchema.nullable(),
  memberships: z.array(membershipSchema),
  /** True where mail is caught on this machine and readable at /development/mailbox. */
  mailbox: z.boolean(),
  /** The demo shop's sign-ins; empty in production. */
  demoSignIns: z.array(z.object({ email: z.string(), password: z.string(), role: roleSchema, displayName: z.string() })),
})
export type Session = z.infer<typeof sessionSchema>
export type Membership = z.infer<typeof membershipSchema>

const tokenSchema = z.string().min(20).max(200)

export const getSession = operation({
  id: 'getSession',
  method: 'get',
  path: '/api/session',
  summary: 'Who is signed in, and the token that writes must carry',
  response: sessionSchema,
  status: 200,
})

export const signIn = operation({
  id: 'signIn',
  method: 'post',
  path: '/api/session',
  summary: 'Sign in',
  body: z.strictObject({ email: emailSchema, password: z.string().min(1).max(200) }),
  response: sessionSchema,
  status: 200,
})

export const signOut = operation({
  id: 'signOut',
  method: 'delete',
  path: '/api/session',
  summary: 'Sign out',
  response: sessionSchema,
  status: 200,
})

/** Answers alike for known and unknown addresses: what happens next is in the mail. */
export const signUp = operation({
  id: 'signUp',
  method: 'post',
  path: '/api/sign-ups',
  summary: 'Ask for a new shop and its owner; a mail with a link completes it',
  body: z.strictObject({
    email: emailSchema,
    displayName: nameSchema,
    shopName: nameSchema,
    password: newPasswordSchema,
  }),
  response: z.object({ sentTo: z.string() }),
  status: 202,
})

export const confirmSignUp = operation({
  id: 'confirmSignUp',
  method: 'post',
  path: '/api/sign-ups/confirm',
  summary: 'Complete a sign-up with the token from the mail; signs in',
  body: z.strictObject({ token: tokenSchema }),
  response: sessionSchema,
  status: 201,
})

/** Answers alike for known and unknown addresses. */
export const requestPasswordReset = operation({
  id: 'requestPasswordReset',
  method: 'post',
  path: '/api/password-resets',
  summary: 'Ask for a mail with a link to set a new password',
  body: z.strictObject({ email: emailSchema }),
  response: z.object({ sentTo: z.string() }),
  status: 202,
})

export const completePasswordReset = operation({
  id: 'completePasswordReset',
  method: 'post',
  path: '/api/password-resets/complete',
  summary: 'Set a new password with the token from the mail; signs every session out',
  body: z.strictObject({ token: tokenSchema, password: newPasswordSchema }),
  status: 204,
})

export const updateAccount = operation({
  id: 'updateAccount',
  method: 'patch',
  path: '/api/account',
  summary: 'Change the own display name',
  body: z.strictObject({ displayName: nameSchema }),
  response: sessionSchema,
  status: 200,
})

export const changePassword = operation({
  id: 'changePassword',
  method: 'post',
  path: '/api/account/password',
  summary: 'Change the own password; signs the other sessions out',
  body: z.strictObject({ currentPassword: z.string().min(1).max(200), newPassword: newPasswordSchema }),
  response: sessionSchema,
  status: 200,
})
