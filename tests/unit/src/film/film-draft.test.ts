import { beforeEach, describe, expect, it } from 'vitest'
import { keepFilmDraft, takeFilmDraft } from '@/api/film-draft.ts'

const draft = { userId: 'u', studyId: 's', exposure: 2.4, replicate: 2, text: '0.0' }
beforeEach(() => localStorage.clear())

describe('a value typed when the page went', () => {
  it('comes back once, to the same person in the same study', () => {
    keepFilmDraft(draft)
    expect(takeFilmDraft({ userId: 'u', studyId: 's' })).toEqual(draft)
    expect(takeFilmDraft({ userId: 'u', studyId: 's' })).toBeNull()
  })
  it('waits for its person and its study', () => {
    keepFilmDraft(draft)
    expect(takeFilmDraft({ userId: 'other', studyId: 's' })).toBeNull()
    expect(takeFilmDraft({ userId: 'u', studyId: 'other' })).toBeNull()
    expect(takeFilmDraft({ userId: 'u', studyId: 's' })).toEqual(draft)
  })
  it('is forgotten where it cannot be read', () => {
    localStorage.setItem('fanlight.film-draft', '{broken')
    expect(takeFilmDraft({ userId: 'u', studyId: 's' })).toBeNull()
    expect(localStorage.length).toBe(0)
  })
})
