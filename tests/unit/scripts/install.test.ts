import { describe, expect, it } from 'vitest'
import { isInstalled, nodeIsUsable } from '../../../scripts/lib/install.mjs'

it.each([
  ['18.20.0', false], ['20.18.9', false], ['20.19.0', true], ['20.20.2', true], ['21.7.0', false], ['22.11.0', false], ['22.12.0', true], ['24.0.0', true],
])('Node %s: usable %s', (version, usable) => {
  expect(nodeIsUsable(version)).toBe(usable)
})

describe('packages count as installed', () => {
  const lock = { packages: { '': { version: '0.1.0' }, 'node_modules/a': { version: '1.0.0' }, 'node_modules/other-platform': { version: '2.0.0', optional: true } } }
  it('when each has the version of the lockfile, and optional ones of other platforms are missing', () => {
    expect(isInstalled(lock, { packages: { 'node_modules/a': { version: '1.0.0' } } })).toBe(true)
  })
  it.each([
    ['nothing is there', null],
    ['one is missing', { packages: { 'node_modules/other-platform': { version: '2.0.0' } } }],
    ['one has another version', { packages: { 'node_modules/a': { version: '1.0.1' } } }],
    ['an optional one has another version', { packages: { 'node_modules/a': { version: '1.0.0' }, 'node_modules/other-platform': { version: '1.9.0' } } }],
    ['there is one more', { packages: { 'node_modules/a': { version: '1.0.0' }, 'node_modules/b': { version: '1.0.0' } } }],
  ])('not when %s', (_, installed) => {
    expect(isInstalled(lock, installed)).toBe(false)
  })
})
