import { expect, it } from 'vitest'
import { chooseProjects, projectOf, projects, testFiles } from '../../../scripts/lib/test-files.mjs'

const files = ['tests/api/film-imports.test.ts', 'tests/browser/film.test.ts', 'tests/reference/lines.test.ts', 'tests/simulation/film.test.ts', 'tests/unit/shared/film/fit.test.ts', 'tests/unit/src/film/grid.test.ts']

it('runs every project that has tests when nothing is asked for', () => {
  expect(chooseProjects([], files)).toEqual({ projects, unknown: [] })
  expect(chooseProjects([], files.slice(1, 3)).projects).toEqual(['reference', 'browser'])
})

it('narrows to the projects of the files whose path holds a word', () => {
  expect(chooseProjects(['tests/api/film'], files).projects).toEqual(['api'])
  expect(chooseProjects(['unit/src'], files).projects).toEqual(['client'])
  expect(chooseProjects(['film'], files).projects).toEqual(['unit', 'client', 'simulation', 'api', 'browser'])
  expect(chooseProjects(['lines', 'grid'], files).projects).toEqual(['client', 'reference'])
})

it('leaves options and their values to vitest', () => {
  expect(chooseProjects(['-t', 'keeps the former value'], files)).toEqual({ projects, unknown: [] })
  expect(chooseProjects(['tests/api', '--bail', '1'], files)).toEqual({ projects: ['api'], unknown: [] })
})

it('names a word that no file holds: a typing error must not pass as a green run', () => {
  expect(chooseProjects(['tests/api/flim'], files).unknown).toEqual(['tests/api/flim'])
})

it('knows the project of every test file there is', () => {
  const all = testFiles()
  expect(all).toContain('tests/unit/scripts/test-files.test.ts')
  expect(all.filter(file => projectOf(file) === null)).toEqual([])
})
