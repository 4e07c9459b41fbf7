import { describe, expect, it } from 'vitest'
import { readReady, readableWords } from '../../../scripts/lib/server-process.mjs'

describe('the last words of a server that ended', () => {
  it('are the sentence of an error, without Node\'s report of where it was thrown', () => {
    expect(readableWords([
      '/srv/fanlight/server/config.ts:75', '    throw new Error(\'The settings are not usable\')', '          ^', '', 'Error: The settings are not usable:',
      'SMTP_URL: required in production', '    at readConfig (/srv/fanlight/server/config.ts:75:11)', '    at async ModuleLoader.import (node:internal/modules/esm/loader:606:24)', '', 'Node.js v20.20.2',
    ])).toEqual(['Error: The settings are not usable:', 'SMTP_URL: required in production'])
  })
  it('are the message of a log entry with that of its error', () => {
    expect(readableWords(['{"level":60,"err":{"message":"connect ECONNREFUSED 127.0.0.1:9","stack":"Error"},"msg":"uncaught exception"}', '{"level":30,"msg":"closing"}']))
      .toEqual(['uncaught exception: connect ECONNREFUSED 127.0.0.1:9', 'closing'])
  })
  it('are the latest eight, and all that there is where nothing is readable', () => {
    expect(readableWords(Array.from({ length: 12 }, (_, i) => `line ${i}`))).toEqual(['line 4', 'line 5', 'line 6', 'line 7', 'line 8', 'line 9', 'line 10', 'line 11'])
    expect(readableWords(['    at somewhere', '{"broken'])).toEqual(['{"broken'])
    expect(readableWords(['    at somewhere'])).toEqual(['    at somewhere'])
  })
})

it('tells the line that says the server listens from any other', () => {
  expect(readReady('FANLIGHT_READY {"url":"http://127.0.0.1:3000","demo":[]}')).toEqual({ url: 'http://127.0.0.1:3000', demo: [] })
  expect(readReady('listening')).toBeNull()
})
