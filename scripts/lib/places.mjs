import { createHash } from 'node:crypto'
import { realpathSync } from 'node:fs'
import { homedir, tmpdir } from 'node:os'
import { basename, join, resolve } from 'node:path'
import { fileURLToPath } from 'node:url'

/** The checkout. Written so that a Node too old for this app still gets as far as being told so. */
export const root = fileURLToPath(new URL('../..', import.meta.url)).replace(/\/$/, '')

/** What only this machine needs; not kept in git. */
export const artifactsFolder = join(root, '.artifacts')

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
  // PostgreSQL's programs stand in another folder than we do.
  if (environment.DATA_DIR !== undefined && environment.DATA_DIR !== '') return resolve(environment.DATA_DIR)
  const hash = createHash('sha256').update(checkout).digest('hex').slice(0, 12)
  const name = `${basename(checkout).replace(/[^A-Za-z0-9]+/g, '-').slice(0, 30)}-${hash}`
  // Root's home is closed to the account that runs PostgreSQL.
  if (uid === 0) return join('/var/tmp', `fanlight-${name}`)
  const given = environment.XDG_STATE_HOME
  // The XDG specification: a relative path is to be ignored.
  const state = given !== undefined && given.startsWith('/') ? given : join(home, '.local', 'state')
  return join(state, 'fanlight', name)
}

export function dataFolder() {
  return dataFolderFor({ checkout: realpathSync(root), uid: process.getuid?.() ?? -1, environment: process.env, home: homedir() })
}

/** Where throw-away clusters lie: as root never in a TMPDIR that the account which runs PostgreSQL may not enter. */
export function temporaryFolder() {
  return process.getuid?.() === 0 ? '/tmp' : tmpdir()
}
