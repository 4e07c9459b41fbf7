/**
 * Whether a number box of this form holds what nobody can read; the first of them gets the focus.
 *
 * Such a box stands for an empty value: saved, it would silently delete what was stored.
 */
export function stopAtUnreadable(form: HTMLElement | null): boolean {
  const box = form?.querySelector<HTMLElement>('[data-unreadable]') ?? null
  box?.focus()
  return box !== null
}
