import { spawnSync } from 'node:child_process'
import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { findPostgresPrograms } from '../../db/cluster/programs.mjs'
import { say, step } from './say.mjs'

export const root = join(import.meta.dirname, '..', '..')

/** @param {string} version of Node, such as "20.20.2" */
export function nodeIsUsable(version) {
  const [major = 0, minor = 0] = version.split('.').map(Number)
  return (major === 20 && minor >= 19) || (major === 22 && minor >= 12) || major > 22
}

export function checkNode() {
  if (!nodeIsUsable(process.versions.node)) {
    throw new Error(`Node ${process.versions.node} is too old or an odd one: install Node 20.19 or newer, or 22.12 or newer.`)
  }
}

/** Installs npm packages from the lockfile when they are missing or the lockfile changed. */
export async function installPackages() {
  const stamp = join(root, 'node_modules', '.fanlight-lock')
  const hash = createHash('sha256').update(readFileSync(join(root, 'package-lock.json'))).digest('hex')
  if (existsSync(stamp) && readFileSync(stamp, 'utf8') === hash) return
  await step('installing npm packages from the lockfile (about a minute)', () => {
    const { status, stdout, stderr } = spawnSync('npm', ['ci', '--no-audit', '--no-fund'], { cwd: root, encoding: 'utf8' })
    if (status !== 0) throw new Error(`npm ci failed:\n${stdout}\n${stderr}`)
    writeFileSync(stamp, hash)
  })
}

function canInstallFromDebian() {
  return process.getuid?.() === 0 && existsSync('/usr/bin/apt-get')
}

function aptInstall(packages) {
  const environment = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' }
  const install = () => spawnSync('apt-get', ['install', '-y', '--no-install-recommends', ...packages], { env: environment, encoding: 'utf8' })
  let result = install()
  if (result.status !== 0) {
    // A fresh machine has no list of packages yet, an old one a stale list.
    spawnSync('apt-get', ['update'], { env: environment, encoding: 'utf8' })
    result = install()
  }
  if (result.status !== 0) throw new Error(`apt-get could not install ${packages.join(' ')}:\n${result.stderr}`)
}

/** Makes sure of PostgreSQL's server programs. */
export async function installPostgres() {
  if (findPostgresPrograms() !== null) return
  const line = 'apt-get install --no-install-recommends postgresql-15'
  if (!canInstallFromDebian()) {
    throw new Error(`PostgreSQL 15 or newer is missing. Install it with this line, or set DATABASE_URL:\n  sudo ${line}`)
  }
  await step('installing PostgreSQL from Debian (about half a minute)', () => {
    // Otherwise Debian makes and starts a cluster of its own on port 5432.
    if (!existsSync('/etc/postgresql-common/createcluster.conf')) {
      mkdirSync('/etc/postgresql-common', { recursive: true })
      writeFileSync('/etc/postgresql-common/createcluster.conf', 'create_main_cluster = false\n')
    }
    aptInstall(['postgresql-15'])
  })
}

/** @returns {string | null} path of a Chromium for browser tests */
export function findChromium() {
  const given = process.env.CHROMIUM_PATH
  if (given !== undefined && existsSync(given)) return given
  return ['/usr/bin/chromium', '/usr/bin/chromium-browser'].find(path => existsSync(path)) ?? null
}

/** Makes sure of Chromium for the browser tests. */
export async function installChromium() {
  if (findChromium() !== null) return
  const line = 'apt-get install --no-install-recommends chromium'
  if (!canInstallFromDebian()) throw new Error(`Chromium is missing for the browser tests. Install it with this line, or set CHROMIUM_PATH:\n  sudo ${line}`)
  await step('installing Chromium from Debian (about half a minute)', () => aptInstall(['chromium']))
  if (findChromium() === null) say('  Chromium is still not found.')
}
