import type { Executor } from '../dependencies.ts'

/**
 * Keeps one prepared statement per connection pool: the reads that every call makes are then built once, and PostgreSQL
 * plans them once per connection. A transaction is an executor of its own and prepares for itself.
 *
 * @example
 * const readThing = preparedOnce(database => database.select().from(thing).where(eq(thing.id, sql.placeholder('id'))).prepare('read_thing'))
 * await readThing(database).execute({ id })
 */
export function preparedOnce<Statement>(prepare: (database: Executor) => Statement): (database: Executor) => Statement {
  const kept = new WeakMap<Executor, Statement>()
  return database => {
    let statement = kept.get(database)
    if (statement === undefined) {
      statement = prepare(database)
      kept.set(database, statement)
    }
    return statement
  }
}
