/**
 * Packages of a lockfile that refuse a version of Node, transitive and optional ones too: an install with engine-strict would
 * stop on another machine, or leave an optional part out in silence.
 *
 * @param {{ packages: Record<string, { engines?: { node?: string } | string[] }> }} lock
 * @param {string} version such as "20.19.0"
 * @param {(version: string, range: string) => boolean} satisfies
 * @returns {string[]}
 */
export function enginesRefusing(lock, version, satisfies) {
  return Object.entries(lock.packages)
    .filter(([path]) => path !== '')
    .flatMap(([path, facts]) => {
      // Very old packages write a list, such as ["node >= 0.6"].
      const range = Array.isArray(facts.engines) ? facts.engines.find(text => /^node\b/.test(text))?.replace(/^node\s*/, '') : facts.engines?.node
      return range === undefined || satisfies(version, range) ? [] : [`${path.replace(/^.*node_modules\//, '')} wants Node ${range}`]
    })
}
