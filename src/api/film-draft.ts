import { z } from 'zod'

const key = 'fanlight.film-draft'
const draftSchema = z.object({ userId: z.string(), studyId: z.string(), exposure: z.number().positive(), replicate: z.int().min(1), text: z.string().max(400) })
export type FilmDraft = z.infer<typeof draftSchema>

/**
 * A value typed but not yet handed over when the page goes: the browser's database answers too late then, so that this
 * one value takes the way that answers at once.
 */
export function keepFilmDraft(draft: FilmDraft): void {
  localStorage.setItem(key, JSON.stringify(draft))
}

/** Takes the kept value of this person and study, once. */
export function takeFilmDraft(of: { readonly userId: string; readonly studyId: string }): FilmDraft | null {
  const kept = localStorage.getItem(key)
  if (kept === null) return null
  const parsed = draftSchema.safeParse(parsedOrNull(kept))
  if (parsed.success && (parsed.data.userId !== of.userId || parsed.data.studyId !== of.studyId)) return null
  localStorage.removeItem(key)
  return parsed.success ? parsed.data : null
}

function parsedOrNull(text: string): unknown {
  try {
    return JSON.parse(text)
  } catch {
    return null
  }
}
