import { describe, expect, it } from 'vitest'
import { closingLine, countsOf } from '../../../scripts/lib/counts.mjs'

const counts = (passed: number, failed: number, skipped = 0) => ({ passed, failed, skipped })

describe('the closing line', () => {
  it('adds up steps and tests, and names skipped ones only where there are some', () => {
    expect(closingLine([counts(1, 0)], [counts(40, 0), counts(7, 0)])).toEqual({ line: '48 passed, 0 failed', code: 0 })
    expect(closingLine([], [counts(40, 0, 2)])).toEqual({ line: '40 passed, 0 failed, 2 skipped', code: 0 })
  })
  it('fails when one step fails, though every test passes', () => {
    expect(closingLine([counts(1, 0), counts(0, 1)], [counts(40, 0)])).toEqual({ line: '41 passed, 1 failed', code: 1 })
  })
  it('fails when one test fails, in whichever project', () => {
    for (const parts of [[counts(3, 1), counts(5, 0)], [counts(3, 0), counts(5, 1)]]) expect(closingLine([counts(1, 0)], parts).code).toBe(1)
  })
  it('fails when no test ran, though every step passes and some were skipped', () => {
    expect(closingLine([counts(1, 0)], [])).toEqual({ line: '1 passed, 1 failed', code: 1 })
    expect(closingLine([counts(1, 0)], [counts(0, 0, 3)])).toEqual({ line: '1 passed, 1 failed, 3 skipped', code: 1 })
  })
})

describe('counts of one run', () => {
  const report = { numPassedTests: 4, numFailedTests: 0, numPendingTests: 1, numTodoTests: 2 }
  it('are those of its report', () => {
    expect(countsOf(0, report)).toEqual(counts(4, 0, 3))
    expect(countsOf(1, { ...report, numFailedTests: 2 })).toEqual(counts(4, 2, 3))
  })
  it('hold a failure when the run is red though no test failed', () => {
    expect(countsOf(1, report).failed).toBe(1)
  })
  it('hold a failure when there is no report', () => {
    expect(countsOf(0, null)).toEqual(counts(0, 1))
  })
})
