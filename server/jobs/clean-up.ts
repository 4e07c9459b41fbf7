import type { Dependencies } from '../dependencies.ts'
import { loggable } from '../loggable.ts'
import { deleteOutdated } from '../repositories/clean-up.ts'

const hourMilliseconds = 3_600_000

/**
 * Deletes outdated links and kept answers every hour. Every server does it: a second time finds nothing.
 *
 * @returns ends it
 */
export function startCleanUp({ database, clock, logger }: Pick<Dependencies, 'database' | 'clock' | 'logger'>): () => void {
  const cleanUp = (): void => {
    deleteOutdated(database, clock()).catch((error: unknown) => logger.warn({ err: loggable(error) }, 'clean-up'))
  }
  const timer = setInterval(cleanUp, hourMilliseconds)
  timer.unref()
  cleanUp()
  return () => clearInterval(timer)
}
