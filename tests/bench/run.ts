import { readFileSync, readdirSync } from 'node:fs'
import { join } from 'node:path'
import { z } from 'zod'
import { formatTable, isMet } from './table.ts'
import type { BenchResult } from './types.ts'

const resultSchema: z.ZodType<BenchResult> = z.object({
  name: z.string(), ours: z.number(), yardstick: z.number(), unit: z.string(), ratio: z.number(), aim: z.number(), higherIsBetter: z.boolean(),
})
const outcomeSchema = z.union([z.array(resultSchema), resultSchema.transform(result => [result])])

/** Every function `bench…` that a module of this folder exports, in the order of the files' names. */
async function findBenches(words: readonly string[]): Promise<{ name: string; run: () => Promise<unknown> }[]> {
  // Looked for in the text: a module of another kind here may do its work when it is imported.
  const holdsBench = (file: string) => /^export (async )?function bench[A-Z]/m.test(readFileSync(join(import.meta.dirname, file), 'utf8'))
  const files = readdirSync(import.meta.dirname).filter(file => file.endsWith('.ts') && holdsBench(file)).sort()
  const benches = []
  for (const file of files.filter(name => words.length === 0 || words.some(word => name.includes(word)))) {
    const module: Record<string, unknown> = await import(new URL(file, import.meta.url).href)
    for (const [name, value] of Object.entries(module)) {
      if (/^bench[A-Z]/.test(name) && typeof value === 'function') benches.push({ name, run: async (): Promise<unknown> => value() })
    }
  }
  return benches
}

const write = (text: string) => process.stdout.write(`${text}\n`)
const results: BenchResult[] = []
let broken = 0
const benches = await findBenches(process.argv.slice(2))
for (const { name, run } of benches) {
  const start = performance.now()
  write(`▸ ${name}`)
  try {
    results.push(...outcomeSchema.parse(await run()))
    write(`  ${((performance.now() - start) / 1000).toFixed(1)} s`)
  } catch (error) {
    // The others still have something to say.
    broken += 1
    write(`  broke: ${error instanceof Error ? error.message : String(error)}`)
  }
}
write(`\n${formatTable(results)}`)
const missed = results.filter(result => !isMet(result)).length
write(`\n${results.length - missed} aims met, ${missed} missed${broken > 0 ? `, ${broken} broke` : ''}`)
process.exit(missed + broken > 0 || results.length === 0 ? 1 : 0)
