import argon2 from 'argon2'

/** Argon2id at the strength that OWASP's Password Storage Cheat Sheet names first for 19 MiB. */
const strength = { type: argon2.argon2id, memoryCost: 19_456, timeCost: 2, parallelism: 1 } as const

/** One keyboard sends é as one character, another as e and an accent. */
const typed = (password: string): string => password.normalize('NFKC')

export function hashPassword(password: string): Promise<string> {
  return argon2.hash(typed(password), strength)
}

/** Made at start, so that the first unknown person is not told by the time it takes to make. */
const dummy = hashPassword('nobody has this password, it only takes its time')

/**
 * Checks a password; for an unknown person (null) the same work is done on a dummy, so that the time tells nothing.
 */
export async function passwordMatches(hash: string | null, password: string): Promise<boolean> {
  const matches = await argon2.verify(hash ?? (await dummy), typed(password))
  return matches && hash !== null
}
