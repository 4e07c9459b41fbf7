import { createRequire } from 'node:module'
import { expect, it } from 'vitest'
import { enginesRefusing } from '../../../scripts/lib/engines.mjs'

const { satisfies }: { satisfies: (version: string, range: string) => boolean } = createRequire(import.meta.url)('semver')
const lockOf = (packages: Record<string, { engines?: { node?: string } | string[]; optional?: boolean }>) => ({ packages: { '': { engines: { node: '>=99' } }, ...packages } })

it('names packages that refuse this Node, deep and optional ones too, and our own entry never', () => {
  const lock = lockOf({
    'node_modules/fits': { engines: { node: '>=18' } },
    'node_modules/wants-more': { engines: { node: '>=22.12' } },
    'node_modules/fits/node_modules/@scope/deep': { engines: { node: '^22.13.0 || >=24' } },
    'node_modules/optional': { engines: { node: '>=24' }, optional: true },
    'node_modules/silent': {},
    'node_modules/other-engine': { engines: {} },
  })
  expect(enginesRefusing(lock, '20.19.0', satisfies)).toEqual([
    'wants-more wants Node >=22.12', '@scope/deep wants Node ^22.13.0 || >=24', 'optional wants Node >=24',
  ])
})

it('takes a range at both of its ends', () => {
  const lock = lockOf({ 'node_modules/a': { engines: { node: '>=20.19.0 <21' } } })
  expect(enginesRefusing(lock, '20.19.0', satisfies)).toEqual([])
  expect(enginesRefusing(lock, '20.18.9', satisfies)).toHaveLength(1)
  expect(enginesRefusing(lock, '21.0.0', satisfies)).toHaveLength(1)
})

it('reads the list that very old packages write', () => {
  expect(enginesRefusing(lockOf({ 'node_modules/old': { engines: ['npm >= 2', 'node >= 0.6'] } }), '20.19.0', satisfies)).toEqual([])
  expect(enginesRefusing(lockOf({ 'node_modules/old': { engines: ['node < 10'] } }), '20.19.0', satisfies)).toHaveLength(1)
})
