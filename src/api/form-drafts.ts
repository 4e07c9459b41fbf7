/** Whose unsaved input it is, and of which form: a tablet at the bench is shared, and drafts are not. */
export interface FormDraftOf {
  readonly userId: string
  readonly form: string
}

const keyOf = ({ userId, form }: FormDraftOf): string => `fanlight.draft:${userId}:${form}`

/** Kept in this tab, so that a reload or a lost session costs nothing. */
export function keepFormDraft(of: FormDraftOf, draft: unknown): void {
  sessionStorage.setItem(keyOf(of), JSON.stringify(draft))
}

/** What was kept, unchecked; null where nothing readable is. */
export function readFormDraft(of: FormDraftOf): unknown {
  try {
    return JSON.parse(sessionStorage.getItem(keyOf(of)) ?? 'null')
  } catch {
    return null
  }
}

export function forgetFormDraft(of: FormDraftOf): void {
  sessionStorage.removeItem(keyOf(of))
}
