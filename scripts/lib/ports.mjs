import { findFreePort } from '../../db/cluster/cluster.mjs'

/**
 * @param {number} port
 * @param {string} [host]
 */
export function isFree(port, host) {
  return findFreePort(port, host).then(() => true, () => false)
}

/**
 * The port to serve on: PORT, or the first free one from 3000.
 *
 * @param {Record<string, string | undefined>} environment
 * @param {(port: number, host?: string) => Promise<boolean>} [free]
 */
export async function choosePort(environment, free = isFree) {
  const { PORT: wanted, HOST: host } = environment
  if (wanted !== undefined && wanted !== '') {
    const port = Number(wanted)
    if (!/^\d+$/.test(wanted) || port > 65_535) throw new Error(`PORT is "${wanted}"; it must be a whole number from 0 to 65535.`)
    if (port !== 0 && !await free(port, host)) throw new Error(`Port ${wanted} is in use or not allowed. Set PORT to another one, or leave it out to have a free one chosen.`)
    return port === 0 ? findFreePort(0, host) : port
  }
  for (let port = 3000; port < 3100; port++) if (await free(port, host)) return port
  return findFreePort(0, host)
}
