/**
 * Packages of a lockfile that refuse a version of Node, transitive ones too: an install with engine-strict would stop
 * on another machine.
 *
 * @param {{ packages: Record<string, { engines?: { node?: string } | string[], optional?: boolean }> }} lock
 * @param {string} version such as "20.19.0"
 * @param {(version: string, range: string) => boolean} satisfies
 * @returns {string[]}
 */
export function enginesRefusing(lock, version, satisfies) {
  return Object.entries(lock.packages)
    .filter(([path, facts]) => path !== '' && facts.optional !== true)
    .flatMap(([path, facts]) => {
      const range = Array.isArray(facts.engines) ? undefined : facts.engines?.node
      return range === undefined || satisfies(version, range) ? [] : [`${path.replace(/^.*node_modules\//, '')} wants Node ${range}`]
    })
}
