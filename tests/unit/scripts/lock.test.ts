import { execFile, spawn } from 'node:child_process'
import { mkdtempSync, readFileSync, readdirSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { promisify } from 'node:util'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { holderOf, takeLock } from '../../../scripts/lib/lock.mjs'

const run = promisify(execFile)
const lockModule = pathToFileURL(join(import.meta.dirname, '../../../scripts/lib/lock.mjs')).href
let folder: string
let path: string

beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'fanlight-lock-'))
  path = join(folder, 'running.json')
})
afterEach(() => rmSync(folder, { recursive: true, force: true }))

const take = () => {
  const lock = takeLock(path)
  if (lock.kind !== 'taken') throw new Error('the lock is held')
  return lock
}

describe('a lock', () => {
  it('is held until it is released, and shows what its holder noted', () => {
    const lock = take()
    lock.note({ address: 'http://127.0.0.1:3000' })
    expect(takeLock(path)).toMatchObject({ kind: 'held', facts: { pid: process.pid, address: 'http://127.0.0.1:3000' } })
    lock.release()
    take().release()
    expect(readdirSync(folder)).toEqual([])
  })

  it('passes on when its holder was killed, with what that one had noted', async () => {
    const child = spawn(process.execPath, ['--input-type=module', '-e', `
      import { takeLock } from '${lockModule}'
      takeLock(${JSON.stringify(path)}).note({ server: 42 })
      console.log('taken')
      setInterval(() => {}, 1000)`])
    await new Promise(resolve => child.stdout.once('data', resolve))
    expect(takeLock(path)).toMatchObject({ kind: 'held', facts: { pid: child.pid } })
    child.kill('SIGKILL')
    await new Promise(resolve => child.once('exit', resolve))
    expect(take().former).toMatchObject({ pid: child.pid, server: 42 })
  })

  it('does not take another process with the same number for its holder', () => {
    const present = holderOf(process.pid)
    writeFileSync(path, JSON.stringify({ ...present, began: '1' }))
    expect(take().former).toMatchObject({ pid: process.pid, began: '1' })
  })

  it.each(['', '{"pid":', '[]', '{"pid":-1,"began":"1"}'])('passes on when its file holds %j', text => {
    writeFileSync(path, text)
    take()
    expect(readFileSync(path, 'utf8')).toContain(`"pid":${process.pid}`)
  })

  it('goes to one of many that come at once upon one that was left behind', async () => {
    for (let round = 0; round < 2; round++) {
      writeFileSync(path, '{"pid":4194305,"began":"1"}')
      const script = `
        import { takeLock } from '${lockModule}'
        console.log(takeLock(${JSON.stringify(path)}).kind)
        setTimeout(() => {}, 1500)`
      const answers = await Promise.all(Array.from({ length: 6 }, () => run(process.execPath, ['--input-type=module', '-e', script])))
      expect(answers.map(({ stdout }) => stdout.trim()).filter(kind => kind === 'taken')).toHaveLength(1)
    }
  }, 60_000)
})
