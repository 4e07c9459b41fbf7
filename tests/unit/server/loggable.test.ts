import { DrizzleQueryError } from 'drizzle-orm/errors'
import { describe, expect, it } from 'vitest'
import { loggable } from '#server/loggable.ts'

describe('loggable', () => {
  it('keeps statement, code and cause of a failed query, and none of its values', () => {
    const cause = Object.assign(new Error('relation "sign_up" does not exist'), { code: '42P01', detail: 'Key (email)=(nell@quillmere.example)' })
    const kept = loggable(new DrizzleQueryError('insert into "sign_up" values ($1, $2)', ['nell@quillmere.example', 'a text\n    at a line of its own'], cause))
    expect(kept.message).toBe('Failed query: insert into "sign_up" values ($1, $2)')
    expect(kept.cause).toMatchObject({ message: 'relation "sign_up" does not exist', code: '42P01' })
    expect(JSON.stringify(kept)).not.toContain('quillmere')
    expect(kept.stack).toContain('loggable.test.ts')
  })

  it('takes whatever was thrown: texts, nothing, copies of errors, causes that go round', () => {
    expect(loggable('broken').message).toBe('broken')
    expect(loggable(undefined).message).toBe('undefined')
    expect(loggable({ message: 'copied\nparams: secret' }).message).toBe('copied')
    const round = new Error('round')
    round.cause = round
    expect(loggable(round).message).toBe('round')
  })
})
