import { readFileSync } from 'node:fs'

/** A file of numbers from outside. */
export interface Reference<Data, Expected> {
  readonly name: string
  readonly source: string
  readonly data: Data
  readonly expected: Expected
}

/**
 * Reads a file of fixtures/reference; its shape is the caller's word.
 *
 * @param name - without its ending
 */
export function readReference<Data, Expected>(name: string): Reference<Data, Expected> {
  return JSON.parse(readFileSync(new URL(`../../fixtures/reference/${name}.json`, import.meta.url), 'utf8'))
}

/** A one-element list may be written as a bare number. */
export function asList(value: number | readonly number[]): readonly number[] {
  return typeof value === 'number' ? [value] : value
}
