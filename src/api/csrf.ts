let token: string | null = null

/** Every answer about the session brings the token that belongs to it. */
export function keepCsrfToken(next: string): void {
  token = next
}

export function forgetCsrfToken(): void {
  token = null
}

/** The token that writes carry; asked for where none is known yet. */
export async function csrfToken(): Promise<string> {
  if (token === null) {
    const answer: unknown = await fetch('/api/session', { credentials: 'same-origin' }).then(response => response.json(), () => null)
    if (typeof answer === 'object' && answer !== null && 'csrfToken' in answer && typeof answer.csrfToken === 'string') token = answer.csrfToken
  }
  return token ?? ''
}
