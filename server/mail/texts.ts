import type { Role } from '#shared/contracts/common.ts'
import type { Mail } from '../dependencies.ts'

/** Names come from strangers: none may become a header, a line or a link of our mail. */
const oneLine = (text: string): string => text.replace(/[\p{Cc}\p{Zl}\p{Zp}]+/gu, ' ').replaceAll('://', ' ').slice(0, 120)

const closing = '\n\nIf you did not ask for this, do nothing: without the link nothing happens.\n\nFanlight'

export function confirmSignUpMail(to: string, facts: { displayName: string; shopName: string; link: string }): Mail {
  return {
    to,
    subject: 'Confirm your address to open your shop',
    text: `Hello ${oneLine(facts.displayName)},\n\nwith this link you open the shop "${oneLine(facts.shopName)}" and are its owner (24 hours):\n\n${facts.link}${closing}`,
  }
}

export function alreadyRegisteredMail(to: string, facts: { displayName: string; link: string }): Mail {
  return {
    to,
    subject: 'You already have an account',
    text: `Hello ${oneLine(facts.displayName)},\n\nsomebody, probably you, asked to sign up with this address. You already have an account: sign in and make another shop from the menu of shops.\n\n${facts.link}${closing}`,
  }
}

export function passwordResetMail(to: string, facts: { displayName: string; link: string }): Mail {
  return {
    to,
    subject: 'Set a new password',
    text: `Hello ${oneLine(facts.displayName)},\n\nwith this link you set a new password (1 hour, once). It signs you out everywhere.\n\n${facts.link}${closing}`,
  }
}

export function noAccountMail(to: string, facts: { link: string }): Mail {
  return {
    to,
    subject: 'There is no account with this address',
    text: `Hello,\n\nsomebody, probably you, asked for a new password for this address. There is no account with it. You may have signed up with another one, or you can sign up here:\n\n${facts.link}${closing}`,
  }
}

export function invitationMail(to: string, facts: { shopName: string; invitedBy: string; role: Role; link: string }): Mail {
  return {
    to,
    subject: `Invitation to the shop ${oneLine(facts.shopName)}`,
    text: `Hello,\n\n${oneLine(facts.invitedBy)} invites you to the shop "${oneLine(facts.shopName)}" as ${facts.role}. Accept with this link (7 days):\n\n${facts.link}${closing}`,
  }
}
