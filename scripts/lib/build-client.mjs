import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, readFileSync, readdirSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { runChild } from './closing.mjs'
import { alone } from './lock.mjs'
import { artifactsFolder, root } from './places.mjs'
import { step } from './say.mjs'

export const clientFolder = join(root, 'dist')

function* filesBelow(folder) {
  if (!existsSync(folder)) return
  for (const entry of readdirSync(folder, { withFileTypes: true }).sort((a, b) => (a.name < b.name ? -1 : 1))) {
    const path = join(folder, entry.name)
    if (entry.isDirectory()) yield* filesBelow(path)
    else yield path
  }
}

function sourcesHash() {
  const hash = createHash('sha256')
  const single = ['index.html', 'vite.config.ts', 'tsconfig.json', 'package.json', 'package-lock.json'].map(name => join(root, name))
  for (const file of [...['src', 'shared', 'public'].flatMap(name => [...filesBelow(join(root, name))]), ...single]) {
    hash.update(file.slice(root.length)).update('\0').update(readFileSync(file)).update('\0')
  }
  return hash.digest('hex')
}

/** Builds the client when its sources changed since the last build. */
export async function buildClient() {
  const stamp = join(clientFolder, '.sources')
  const hash = sourcesHash()
  const upToDate = () => existsSync(stamp) && readFileSync(stamp, 'utf8') === hash
  if (upToDate()) return
  mkdirSync(artifactsFolder, { recursive: true })
  await alone(join(artifactsFolder, 'build.lock'), async () => {
    if (upToDate()) return
    // Made aside and then moved: a server that runs from this checkout never serves a half-made client.
    const aside = join(artifactsFolder, 'client')
    const former = join(artifactsFolder, 'client-before')
    await step('building the client', async () => {
      const vite = join(root, 'node_modules', 'vite', 'bin', 'vite.js')
      // Where a test or a developer's shell has another NODE_ENV the build would keep the warnings meant for development.
      const env = { ...process.env, NODE_ENV: 'production' }
      const { status, output } = await runChild(process.execPath, [vite, 'build', '--logLevel', 'warn', '--outDir', aside, '--emptyOutDir'], { cwd: root, env })
      if (status !== 0) throw new Error(`The client does not build:\n${output}`)
    })
    writeFileSync(join(aside, '.sources'), hash)
    rmSync(former, { recursive: true, force: true })
    if (existsSync(clientFolder)) renameSync(clientFolder, former)
    renameSync(aside, clientFolder)
    rmSync(former, { recursive: true, force: true })
  })
}
