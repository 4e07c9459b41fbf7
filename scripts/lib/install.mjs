import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { findPostgresPrograms } from '../../db/cluster/programs.mjs'
import { runChild } from './closing.mjs'
import { alone } from './lock.mjs'
import { artifactsFolder, root } from './places.mjs'
import { step } from './say.mjs'

/** @param {string} version of Node, such as "20.20.2" */
export function nodeIsUsable(version) {
  const [major = 0, minor = 0] = version.split('.').map(Number)
  return (major === 20 && minor >= 19) || (major === 22 && minor >= 12) || major > 22
}

export function checkNode() {
  if (!nodeIsUsable(process.versions.node)) {
    throw new Error(`Node ${process.versions.node} does not run Fanlight: install Node 20.19 or a newer 20, or 22.12 or newer.`)
  }
}

/**
 * Whether node_modules holds what the lockfile says, by npm's own record of it.
 *
 * @param {{ packages: Record<string, { version?: string, optional?: boolean, link?: boolean }> }} lock
 * @param {{ packages: Record<string, { version?: string }> } | null} installed
 */
export function isInstalled(lock, installed) {
  if (installed === null) return false
  const wanted = Object.entries(lock.packages).filter(([path]) => path !== '')
  // Optional packages of other platforms are rightly missing, but none may be there in another version.
  const matches = wanted.every(([path, facts]) => {
    const found = installed.packages[path]
    return found === undefined ? facts.optional === true : found.version === facts.version
  })
  return matches && Object.keys(installed.packages).every(path => path in lock.packages)
}

/** Installs npm packages from the lockfile when they are missing or the lockfile changed. */
export async function installPackages() {
  const modules = join(root, 'node_modules')
  const stamp = join(modules, '.fanlight-lock')
  const text = readFileSync(join(root, 'package-lock.json'), 'utf8')
  const hash = createHash('sha256').update(text).digest('hex')
  const upToDate = () => existsSync(stamp) && readFileSync(stamp, 'utf8') === hash
  if (upToDate()) return
  mkdirSync(artifactsFolder, { recursive: true })
  await alone(join(artifactsFolder, 'install.lock'), async () => {
    if (upToDate()) return
    const record = join(modules, '.package-lock.json')
    // Somebody may have installed by hand; npm ci would only do the same again.
    if (!isInstalled(JSON.parse(text), existsSync(record) ? JSON.parse(readFileSync(record, 'utf8')) : null)) {
      await step('installing npm packages from the lockfile (about a minute)', async () => {
        const { status, output } = await runChild('npm', ['ci', '--no-audit', '--no-fund', '--include=dev', '--include=optional'], { cwd: root, hardAfterMilliseconds: 1_000 })
        if (status !== 0) throw new Error(`npm ci failed:\n${output}`)
      })
    }
    writeFileSync(stamp, hash)
  })
}

function canInstallFromDebian() {
  return process.getuid?.() === 0 && existsSync('/usr/bin/apt-get')
}

/** @param {readonly string[]} packages the first of them that this Debian or Ubuntu has */
async function aptInstall(packages) {
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' }
  // Broken off half-way the package system would ask for repair: it may take its time to end.
  const apt = parameters => runChild('apt-get', ['-o', 'DPkg::Lock::Timeout=300', ...parameters], { env, hardAfterMilliseconds: 120_000, mayOutlive: true })
  let output = ''
  // A fresh machine has no list of packages yet, an old one a stale list.
  for (const withNewList of [false, true]) {
    if (withNewList) await apt(['update'])
    for (const name of packages) {
      const result = await apt(['install', '-y', '--no-install-recommends', name])
      if (result.status === 0) return
      output = result.output
    }
  }
  throw new Error(`apt-get could not install ${packages.join(' or ')}:\n${output}`)
}

/** Makes sure of PostgreSQL's server programs. */
export async function installPostgres() {
  if (findPostgresPrograms() !== null) return
  if (!canInstallFromDebian()) {
    throw new Error('PostgreSQL 15 or newer is missing. Install it with this line, or set DATABASE_URL:\n  sudo apt-get install --no-install-recommends postgresql')
  }
  await step('installing PostgreSQL from Debian (about half a minute)', async () => {
    // Otherwise Debian makes and starts a cluster of its own on port 5432. A file that is there is the owner's choice.
    if (!existsSync('/etc/postgresql-common/createcluster.conf')) {
      mkdirSync('/etc/postgresql-common', { recursive: true })
      writeFileSync('/etc/postgresql-common/createcluster.conf', 'create_main_cluster = false\n')
    }
    await aptInstall(['postgresql-15', 'postgresql'])
  })
  if (findPostgresPrograms() === null) throw new Error('PostgreSQL was installed, yet its server programs are not found in /usr/lib/postgresql or on the PATH.')
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
  if (findChromium() === null) throw new Error('Chromium was installed, yet is not found in /usr/bin. Set CHROMIUM_PATH.')
}
