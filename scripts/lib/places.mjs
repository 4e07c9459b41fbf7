import { createHash } from 'node:crypto'
import { realpathSync } from 'node:fs'
import { homedir } from 'node:os'
import { basename, join } from 'node:path'

/**
 * Where a checkout keeps its database and secrets: outside the checkout, whose folders the account that runs PostgreSQL
 * may not be able to enter, under a name derived from the checkout's real path.
 *
 * @param {object} facts
 * @param {string} facts.checkout
 * @param {number} facts.uid
 * @param {Record<string, string | undefined>} facts.environment
 * @param {string} facts.home
 */
export function dataFolderFor({ checkout, uid, environment, home }) {
  if (environment.DATA_DIR !== undefined && environment.DATA_DIR !== '') return environment.DATA_DIR
  const hash = createHash('sha256').update(checkout).digest('hex').slice(0, 12)
  const name = `${basename(checkout).replace(/[^A-Za-z0-9]+/g, '-').slice(0, 30)}-${hash}`
  // Root's home is closed to the account that runs PostgreSQL.
  if (uid === 0) return join('/var/tmp', `fanlight-${name}`)
  return join(environment.XDG_STATE_HOME ?? join(home, '.local', 'state'), 'fanlight', name)
}

/** @param {string} root of the checkout */
export function dataFolder(root) {
  return dataFolderFor({ checkout: realpathSync(root), uid: process.getuid?.() ?? -1, environment: process.env, home: homedir() })
}
