import { describe, expect, it } from 'vitest'
import { whoWorksOn } from '../../../../db/cluster/postmaster.mjs'
import { majorVersionIn } from '../../../../db/cluster/programs.mjs'

const ours = '/var/tmp/fanlight-a/postgres'
const theirs = '/var/lib/postgresql/15/main'
const owner = 101
const master = (pid: number, folder: string) => ({ pid, uid: owner, words: ['/usr/lib/postgresql/15/bin/postgres', '-D', folder, '-p', '4242'], folder })
const worker = (pid: number, folder: string | null, uid = owner) => ({ pid, uid, words: ['postgres: checkpointer '], folder })

describe('who works on a data folder', () => {
  it('is the PostgreSQL that the pid file names, on this folder', () => {
    expect(whoWorksOn(ours, 7, owner, [worker(8, ours), master(7, ours)])).toEqual({ kind: 'runs', pid: 7 })
  })
  it('is known by the command line where we may not see the folder that a process stands in', () => {
    expect(whoWorksOn(ours, 7, owner, [{ ...master(7, ours), folder: null }])).toEqual({ kind: 'runs', pid: 7 })
  })
  it('is nobody when the number in the file is another program\'s by now, or a PostgreSQL\'s on another folder', () => {
    expect(whoWorksOn(ours, 7, owner, [{ pid: 7, uid: owner, words: ['sleep', '100'], folder: '/' }])).toEqual({ kind: 'nobody' })
    expect(whoWorksOn(ours, 7, owner, [master(7, theirs)])).toEqual({ kind: 'nobody' })
    expect(whoWorksOn(ours, 7, owner, [{ pid: 7, uid: owner, words: ['vi', ours], folder: ours }])).toEqual({ kind: 'nobody' })
  })
  it('are the workers that a killed postmaster left', () => {
    expect(whoWorksOn(ours, 7, owner, [worker(8, ours), worker(9, theirs), worker(10, ours)])).toEqual({ kind: 'orphans', pids: [8, 10] })
    expect(whoWorksOn(ours, null, owner, [worker(8, ours)])).toEqual({ kind: 'orphans', pids: [8] })
  })
  it('is unclear while workers of the same account run whose folder we may not see; other people\'s do not matter', () => {
    expect(whoWorksOn(ours, 7, owner, [worker(8, null)])).toEqual({ kind: 'unclear' })
    expect(whoWorksOn(ours, 7, owner, [worker(8, null, 1000)])).toEqual({ kind: 'nobody' })
  })
})

it.each([
  ['postgres (PostgreSQL) 15.14 (Debian 15.14-0+deb12u1)', 15], ['postgres (PostgreSQL) 17beta1', 17], ['postgres (PostgreSQL) 9.6.24', 9], ['', null],
])('reads the version in %j', (answer, version) => {
  expect(majorVersionIn(answer)).toBe(version)
})
