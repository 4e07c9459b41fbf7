interface Film {
  readonly exposure: number
  readonly replicateText: string | null
}

/** Number of a film as typed; films without a number come after the numbered ones, in the order of the file. */
const orderOf = (film: Film) => (film.replicateText !== null && /^\+?\d+$/.test(film.replicateText) ? Number(film.replicateText) : Number.POSITIVE_INFINITY)

/**
 * Columns of the entry grid for imported films: within one exposure they follow the films that are there already, in the
 * order of their film numbers, else of the file.
 *
 * @param lastColumnOf - the last filled column of an exposure, where it has any
 * @returns column of each film, from 1, in the order given
 */
export function assignReplicates(films: readonly Film[], lastColumnOf: ReadonlyMap<number, number>): Int32Array {
  const columns = new Int32Array(films.length)
  const next = new Map(lastColumnOf)
  const place = (i: number, film: Film) => {
    const column = (next.get(film.exposure) ?? 0) + 1
    next.set(film.exposure, column)
    columns[i] = column
  }
  if (films.every(film => film.replicateText === null)) {
    films.forEach((film, i) => place(i, film))
    return columns
  }
  const ordered = films.map((film, i) => ({ film, i, order: orderOf(film) }))
  // Infinity minus itself is no order: films without a number keep the file's.
  ordered.sort((a, b) => (a.order === b.order ? a.i - b.i : a.order - b.order))
  for (const { film, i } of ordered) place(i, film)
  return columns
}
