import { spawn, type ChildProcess } from 'node:child_process'
import { existsSync, mkdtempSync, readFileSync, rmSync, statSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { processesOf, waitUntil } from '#tests/helpers/processes.ts'
import { isAlive } from '../../db/cluster/postmaster.mjs'
import { temporaryFolder } from '../../scripts/lib/places.mjs'

const root = join(import.meta.dirname, '../..')
const startSeconds = 120

interface Start {
  readonly child: ChildProcess
  output(): string
  /** The exit code, once it has ended. */
  ended(): Promise<number | null>
}

function start(environment: Record<string, string>): Start {
  const child = spawn(process.execPath, ['scripts/start.mjs'], { cwd: root, env: { ...process.env, DATABASE_URL: '', PORT: '0', LOG_LEVEL: 'error', ...environment }, stdio: ['ignore', 'pipe', 'pipe'] })
  let output = ''
  for (const stream of [child.stdout, child.stderr]) stream.setEncoding('utf8').on('data', text => { output += text })
  const exit = new Promise<number | null>(resolve => child.once('close', resolve))
  return { child, output: () => output, ended: () => exit }
}

async function ready(run: Start): Promise<string> {
  await waitUntil('the address is printed', () => run.output().includes('Ctrl-C ends everything') || run.child.exitCode !== null, startSeconds)
  const address = /http:\/\/127\.0\.0\.1:\d+/.exec(run.output())?.[0]
  if (address === undefined) throw new Error(`it did not start:\n${run.output()}`)
  return address
}

describe('npm start', () => {
  const folder = mkdtempSync(join(temporaryFolder(), 'fanlight start-'))
  const environment = { DATA_DIR: folder }
  const serverPid = (): number => JSON.parse(readFileSync(join(folder, 'running.json'), 'utf8')).server.pid
  const nothingLeft = (server: number) => waitUntil('no process is left', () => processesOf(folder).length === 0 && !isAlive(server))
  afterAll(() => {
    for (const pid of processesOf(folder)) process.kill(pid, 'SIGKILL')
    rmSync(folder, { recursive: true, force: true })
  })

  it('serves client and API, names the demo sign-ins, refuses a second one plainly, and leaves nothing after SIGTERM', async () => {
    const run = start(environment)
    const address = await ready(run)
    expect(run.output()).toContain('starting PostgreSQL')
    expect(run.output()).toMatch(/engineer +\S+@\S+\.example/)
    expect((await fetch(`${address}/api/session`)).status).toBe(200)
    expect(await (await fetch(address)).text()).toContain('<div id="app">')
    expect((statSync(join(folder, 'session-secret')).mode & 0o777).toString(8)).toBe('600')

    const second = start(environment)
    expect(await second.ended()).toBe(1)
    expect(second.output()).toContain(`already runs from this folder: ${address}`)

    const server = serverPid()
    run.child.kill('SIGTERM')
    expect(await run.ended()).toBe(0)
    await nothingLeft(server)
    expect(existsSync(join(folder, 'running.json'))).toBe(false)
  }, 180_000)

  it('keeps the demo shop and the secret, and leaves nothing when it is killed hard', async () => {
    const secret = readFileSync(join(folder, 'session-secret'), 'utf8')
    const run = start(environment)
    await ready(run)
    expect(run.output()).toMatch(/engineer +\S+@\S+\.example/)
    const server = serverPid()
    run.child.kill('SIGKILL')
    await nothingLeft(server)
    expect(readFileSync(join(folder, 'session-secret'), 'utf8')).toBe(secret)
  }, 180_000)

  it('ends with a failure, and PostgreSQL with it, when the server ends by itself', async () => {
    const run = start(environment)
    await ready(run)
    const server = serverPid()
    process.kill(server, 'SIGKILL')
    expect(await run.ended()).toBe(1)
    expect(run.output()).toContain('The server ended by itself')
    await nothingLeft(server)
  }, 180_000)

  it('says what is wrong with PORT, and stops what it had started', async () => {
    const run = start({ ...environment, PORT: 'eighty' })
    expect(await run.ended()).toBe(1)
    expect(run.output()).toContain('PORT is "eighty"')
    expect(processesOf(folder)).toEqual([])
  }, 180_000)
})
