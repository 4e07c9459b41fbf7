/** What an error may leave in a log: names, codes and where, without the values of a statement (links, hashes, addresses). */
export interface LoggableError {
  readonly name: string
  readonly message: string
  readonly code?: string
  readonly stack?: string
  readonly cause?: LoggableError
}

/** The statement without its values: Drizzle writes both into the message. */
const withoutValues = (text: string): string => text.replace(/\nparams: [\s\S]*$/, '')

/**
 * Makes an error fit for the log.
 *
 * @example
 * logger.error({ err: loggable(error) }, 'unexpected error')
 */
export function loggable(error: unknown, depth = 0): LoggableError {
  if (!(error instanceof Error)) {
    // Some libraries hand over a copy of an error with only its fields.
    const message = typeof error === 'object' && error !== null && 'message' in error ? String(error.message) : String(error)
    return { name: 'Error', message: withoutValues(message) }
  }
  const code = 'code' in error && typeof error.code === 'string' ? error.code : undefined
  return {
    name: error.name,
    message: withoutValues(error.message),
    ...(code === undefined ? {} : { code }),
    // The stack begins with the message; values may hold lines that look like a stack's.
    ...(error.stack === undefined ? {} : { stack: withoutValues(error.stack.replace(error.message, () => withoutValues(error.message))) }),
    ...(error.cause === undefined || depth === 5 ? {} : { cause: loggable(error.cause, depth + 1) }),
  }
}
