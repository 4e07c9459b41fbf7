import { existsSync, readdirSync } from 'node:fs'
import { join } from 'node:path'
import { root } from './places.mjs'

/** vite.config.ts's projects in the order in which they run: what fails quickly comes first. */
export const projects = ['unit', 'client', 'reference', 'simulation', 'api', 'browser']
/** Those that need a PostgreSQL. */
export const heavyProjects = ['api', 'browser']

/**
 * The project that a test file belongs to, as vite.config.ts has it.
 *
 * @param {string} path such as "tests/api/film.test.ts"
 */
export function projectOf(path) {
  if (path.startsWith('tests/unit/src/')) return 'client'
  return projects.find(project => path.startsWith(`tests/${project}/`)) ?? null
}

/** @returns {string[]} every test file, relative to the checkout */
export function testFiles() {
  const folder = join(root, 'tests')
  if (!existsSync(folder)) return []
  return readdirSync(folder, { recursive: true }).map(name => `tests/${String(name).replaceAll('\\', '/')}`).filter(name => name.endsWith('.test.ts')).sort()
}

/**
 * What the words after `npm test --` ask for. Those that are part of a file's path narrow to it, as vitest does; options,
 * with their values, go to vitest as they are.
 *
 * @param {readonly string[]} words
 * @param {readonly string[]} files
 * @returns {{ projects: string[], unknown: string[] }} unknown: words that are neither
 */
export function chooseProjects(words, files) {
  const isOption = word => word.startsWith('-')
  const isFilter = word => !isOption(word) && files.some(file => file.includes(word))
  const filters = words.filter(isFilter)
  const unknown = words.filter((word, place) => !isOption(word) && !isFilter(word) && !(place > 0 && isOption(words[place - 1])))
  const chosen = new Set(files.filter(file => filters.length === 0 || filters.some(filter => file.includes(filter))).map(projectOf))
  return { projects: projects.filter(project => chosen.has(project)), unknown }
}
