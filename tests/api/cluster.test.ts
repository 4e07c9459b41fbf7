import { spawn } from 'node:child_process'
import { existsSync, mkdirSync, mkdtempSync, readFileSync, readdirSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import pg from 'pg'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { processesOf, waitUntil } from '#tests/helpers/processes.ts'
import { dataFolderIn, makePrivateFolder, startCluster, type Cluster } from '../../db/cluster/cluster.mjs'
import { isAlive } from '../../db/cluster/postmaster.mjs'
import { unprivilegedAccount } from '../../db/cluster/programs.mjs'
import { temporaryFolder } from '../../scripts/lib/places.mjs'

const scripts = join(import.meta.dirname, '../../scripts/lib')
const newFolder = () => mkdtempSync(join(temporaryFolder(), 'fanlight cluster-'))
const modeOf = (path: string) => (statSync(path).mode & 0o777).toString(8)

async function query(url: string, sql: string): Promise<unknown[]> {
  const client = new pg.Client({ connectionString: url })
  await client.connect()
  try {
    return (await client.query<Record<string, unknown>>(sql)).rows.flatMap(row => Object.values(row))
  } finally {
    await client.end()
  }
}

function killAll(folder: string): void {
  for (const pid of processesOf(folder)) process.kill(pid, 'SIGKILL')
}

describe('the PostgreSQL of a checkout', () => {
  let folder: string
  let cluster: Cluster
  beforeAll(async () => {
    folder = newFolder()
    cluster = await startCluster({ folder, durable: true })
    await query(cluster.url, 'create table kept (n int)')
  })
  afterAll(async () => {
    await cluster.stop()
    rmSync(folder, { recursive: true, force: true })
  })
  const again = async () => { cluster = await startCluster({ folder, durable: true }) }
  const rows = async () => Number((await query(cluster.url, 'select count(*) from kept'))[0])

  it('runs as an unprivileged account in a folder of its own, and writes what it has promised to keep', async () => {
    const owner = statSync(`/proc/${cluster.pid}`).uid
    expect(owner).toBe(unprivilegedAccount()?.uid ?? process.getuid?.())
    expect(owner).not.toBe(0)
    expect(modeOf(dataFolderIn(folder))).toBe('700')
    expect(modeOf(join(folder, 'database-password'))).toBe('600')
    expect(await query(cluster.url, 'show fsync')).toEqual(['on'])
    expect(await query(cluster.url, 'show listen_addresses')).toEqual(['127.0.0.1'])
  })

  it('lets nobody in without the password', async () => {
    const url = new URL(cluster.url)
    url.password = 'guessed'
    await expect(query(url.toString(), 'select 1')).rejects.toMatchObject({ code: '28P01' })
    url.password = ''
    await expect(query(url.toString(), 'select 1')).rejects.toThrow(/password/)
  })

  it('has everything that was written when postmaster and workers are killed hard', async () => {
    await query(cluster.url, 'insert into kept select generate_series(1, 500)')
    killAll(dataFolderIn(folder))
    await waitUntil('all are gone', () => processesOf(dataFolderIn(folder)).length === 0)
    await again()
    expect(cluster.created).toBe(false)
    expect(await rows()).toBe(500)
  })

  it('starts when only the postmaster was killed and its workers are about to end', async () => {
    process.kill(cluster.pid, 'SIGKILL')
    await again()
    expect(await rows()).toBe(500)
  })

  it('is taken over where one was left running: never two on one folder', async () => {
    const former = cluster.pid
    await again()
    expect(cluster.pid).not.toBe(former)
    expect(processesOf(dataFolderIn(folder))).not.toContain(former)
    expect(await rows()).toBe(500)
  })

  it('starts though another process has the number in the pid file by now, and leaves that process alone', async () => {
    killAll(dataFolderIn(folder))
    await waitUntil('all are gone', () => processesOf(dataFolderIn(folder)).length === 0)
    const account = unprivilegedAccount()
    const other = spawn('sleep', ['60'], { cwd: '/', ...(account === null ? {} : { uid: account.uid, gid: account.gid }) })
    try {
      const path = join(dataFolderIn(folder), 'postmaster.pid')
      writeFileSync(path, readFileSync(path, 'utf8').replace(/^\d+/, String(other.pid)))
      await again()
      expect(await rows()).toBe(500)
      expect(other.exitCode ?? other.signalCode).toBeNull()
    } finally {
      other.kill()
    }
  })

  it('begins anew after a first start that was killed half-way', async () => {
    const torso = newFolder()
    mkdirSync(`${dataFolderIn(torso)}.half/base`, { recursive: true })
    writeFileSync(join(torso, 'database-password'), 'of the torso\n')
    const fresh = await startCluster({ folder: torso, durable: false })
    expect(fresh.created).toBe(true)
    expect(await query(fresh.url, 'select 1')).toEqual([1])
    await fresh.stop()
    expect(processesOf(torso)).toEqual([])
    rmSync(torso, { recursive: true, force: true })
  })
})

describe('a folder that is not ours', () => {
  it('is refused and left as it is', () => {
    const folder = newFolder()
    writeFileSync(join(folder, 'letters.txt'), 'mine')
    const before = modeOf(folder)
    expect(() => makePrivateFolder(folder)).toThrow('holds other things')
    expect(modeOf(folder)).toBe(before)
    expect(readdirSync(folder)).toEqual(['letters.txt'])
    rmSync(folder, { recursive: true, force: true })
  })
})

describe('the throw-away PostgreSQL of a test run', () => {
  it('goes with its folder and its programs when the run is killed hard', async () => {
    const child = spawn(process.execPath, ['--input-type=module', '-e', `
      import { runChild } from '${pathToFileURL(join(scripts, 'closing.mjs')).href}'
      import { startThrowAwayCluster } from '${pathToFileURL(join(scripts, 'throw-away-cluster.mjs')).href}'
      const { url, folder } = await startThrowAwayCluster()
      void runChild('/bin/sh', ['-c', 'echo program $$; exec sleep 61'], { show: true })
      console.log('ready ' + JSON.stringify({ url, folder }))
    `], { stdio: ['ignore', 'pipe', 'inherit'] })
    let output = ''
    child.stdout.setEncoding('utf8').on('data', text => { output += text })
    await waitUntil('the cluster runs', () => /ready \{.*\n/.test(output) && /program \d+\n/.test(output), 60)
    const program = Number(/program (\d+)/.exec(output)?.[1])
    const { url, folder }: { url: string; folder: string } = JSON.parse(/ready (.*)/.exec(output)?.[1] ?? '')
    expect(await query(url, 'show fsync')).toEqual(['off'])
    child.kill('SIGKILL')
    await waitUntil('nothing is left of it', () => !existsSync(folder) && processesOf(folder).length === 0 && !isAlive(program))
  })
})
