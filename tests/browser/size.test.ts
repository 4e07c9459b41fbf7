import { existsSync, readFileSync, readdirSync } from 'node:fs'
import { join } from 'node:path'
import { gzipSync } from 'node:zlib'
import { describe, expect, it } from 'vitest'
import { z } from 'zod'

const dist = 'dist'
const chunkSchema = z.object({
  file: z.string(),
  isEntry: z.boolean().optional(),
  imports: z.array(z.string()).optional(),
  dynamicImports: z.array(z.string()).optional(),
})
const manifest = z.record(z.string(), chunkSchema).parse(JSON.parse(readFileSync(join(dist, '.vite', 'manifest.json'), 'utf8')))

const kilobytes = (file: string): number => gzipSync(readFileSync(join(dist, file))).length / 1000

/** A chunk and all that it imports at once, as a browser fetches them. */
function withImports(key: string, seen = new Set<string>()): Set<string> {
  const chunk = manifest[key]
  if (chunk === undefined || seen.has(chunk.file)) return seen
  seen.add(chunk.file)
  for (const next of chunk.imports ?? []) withImports(next, seen)
  return seen
}

const entry = Object.keys(manifest).find(key => manifest[key]?.isEntry === true) ?? ''
const total = (files: Iterable<string>): number => [...files].filter(file => file.endsWith('.js')).reduce((sum, file) => sum + kilobytes(file), 0)

describe('JavaScript that a browser fetches, gzipped', () => {
  it('for sign-in is at most 150 kB', () => {
    const files = new Set([...withImports(entry), ...withImports('src/views/SignInView.vue')])
    const size = total(files)
    process.stdout.write(`sign-in: ${size.toFixed(1)} kB in ${files.size} files\n`)
    expect(files.size).toBeGreaterThan(3)
    expect(size).toBeLessThanOrEqual(150)
  })

  it('for a study with its charts and its worker is at most 450 kB in all', () => {
    const keys = [entry, 'src/components/frame/ShopFrame.vue', 'src/views/StudyView.vue', ...(manifest['src/views/StudyView.vue']?.dynamicImports ?? [])]
    const files = new Set(keys.flatMap(key => [...withImports(key)]))
    // Workers are no chunks of the manifest: the one that fits is fetched with the page, the one of imports only when a file is chosen.
    const worker = readdirSync(join(dist, 'assets')).filter(name => /^film-worker-.*\.js$/.test(name)).map(name => `assets/${name}`)
    expect(worker.length).toBe(1)
    const size = total([...files, ...worker])
    process.stdout.write(`study: ${size.toFixed(1)} kB in ${files.size + worker.length} files\n`)
    expect(size).toBeLessThanOrEqual(450)
  })

  it('comes with the notices of what it is made of', () => {
    expect(existsSync(join(dist, 'licenses.md'))).toBe(true)
  })
})
