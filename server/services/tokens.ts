import { createHash, randomBytes } from 'node:crypto'

/** A secret for a link in a mail: 256 bits, safe in an address. */
export function newToken(): string {
  return randomBytes(32).toString('base64url')
}

/** What the database keeps of a token: the table alone opens nothing. */
export function hashToken(token: string): string {
  return createHash('sha256').update(token).digest('hex')
}
