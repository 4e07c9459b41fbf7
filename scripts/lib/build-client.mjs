import { spawnSync } from 'node:child_process'
import { createHash } from 'node:crypto'
import { existsSync, readFileSync, readdirSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { root } from './install.mjs'
import { step } from './say.mjs'

export const clientFolder = join(root, 'dist')

function* filesBelow(folder) {
  for (const entry of readdirSync(folder, { withFileTypes: true }).sort((a, b) => (a.name < b.name ? -1 : 1))) {
    const path = join(folder, entry.name)
    if (entry.isDirectory()) yield* filesBelow(path)
    else yield path
  }
}

function sourcesHash() {
  const hash = createHash('sha256')
  const files = [...filesBelow(join(root, 'src')), ...filesBelow(join(root, 'shared')), ...['index.html', 'vite.config.ts', 'package-lock.json'].map(name => join(root, name))]
  for (const file of files) hash.update(file.slice(root.length)).update('\0').update(readFileSync(file))
  return hash.digest('hex')
}

/** Builds the client when its sources changed since the last build. */
export async function buildClient() {
  const stamp = join(clientFolder, '.sources')
  const hash = sourcesHash()
  if (existsSync(stamp) && readFileSync(stamp, 'utf8') === hash) return
  await step('building the client', () => {
    const { status, stdout, stderr } = spawnSync(process.execPath, [join(root, 'node_modules', 'vite', 'bin', 'vite.js'), 'build', '--logLevel', 'warn'], { cwd: root, encoding: 'utf8' })
    if (status !== 0) throw new Error(`The client does not build:\n${stdout}\n${stderr}`)
    writeFileSync(stamp, hash)
  })
}
