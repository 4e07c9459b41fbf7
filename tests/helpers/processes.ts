import { processTable } from '../../db/cluster/postmaster.mjs'

/** Numbers of the processes that name a folder in their command line or stand in it. */
export function processesOf(folder: string): number[] {
  return processTable()
    .filter(facts => facts.folder?.startsWith(folder) === true || facts.words.some(word => word.includes(folder)))
    .map(facts => facts.pid)
}

/** Waits until something is so; says what was waited for when it does not come. */
export async function waitUntil(what: string, isSo: () => boolean | Promise<boolean>, seconds = 20): Promise<void> {
  const end = Date.now() + seconds * 1000
  while (!(await isSo())) {
    if (Date.now() > end) throw new Error(`not within ${seconds} s: ${what}`)
    await new Promise(resolve => setTimeout(resolve, 50))
  }
}
