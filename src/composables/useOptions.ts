import { useQuery } from '@tanstack/vue-query'
import { computed, type ComputedRef } from 'vue'
import { call } from '@/api/call.ts'
import { printers, resins } from '@/api/things.ts'

type Options = ComputedRef<{ value: string; label: string }[]>

/** Beyond this a choice from a list helps nobody; the lists of the shop can be searched. */
const optionsMax = 2000

/** Every page of a list: a shop with more than one page of printers must still find the last. */
async function allPages<T>(load: (cursor: string | undefined) => Promise<{ readonly items: readonly T[]; readonly nextCursor: string | null }>): Promise<T[]> {
  const items: T[] = []
  let cursor: string | undefined
  do {
    const page = await load(cursor)
    items.push(...page.items)
    cursor = page.nextCursor ?? undefined
  } while (cursor !== undefined && items.length < optionsMax)
  return items
}

/** The printers of a shop to choose from; `first` stands for none. */
export function usePrinterOptions(shopId: ComputedRef<string>, first: string): Options {
  const query = useQuery({
    queryKey: computed(() => ['printer-options', shopId.value]),
    queryFn: () => allPages(cursor => call(printers.listPrinters, { params: { shopId: shopId.value }, query: { limit: 200, cursor } })),
  })
  return computed(() => [{ value: '', label: first }, ...(query.data.value ?? []).map(item => ({ value: item.id, label: item.name }))])
}

/** The resins of a shop to choose from. */
export function useResinOptions(shopId: ComputedRef<string>, first: string): Options {
  const query = useQuery({
    queryKey: computed(() => ['resin-options', shopId.value]),
    queryFn: () => allPages(cursor => call(resins.listResins, { params: { shopId: shopId.value }, query: { limit: 200, cursor } })),
  })
  return computed(() => [{ value: '', label: first }, ...(query.data.value ?? []).map(item => ({ value: item.id, label: item.name }))])
}

/** The lots of a resin to choose from. */
export function useLotOptions(shopId: ComputedRef<string>, resinId: ComputedRef<string>, first: string): Options {
  const query = useQuery({
    queryKey: computed(() => ['lot-options', shopId.value, resinId.value]),
    queryFn: () => allPages(cursor => call(resins.listLots, { params: { shopId: shopId.value }, query: { limit: 200, resinId: resinId.value, cursor } })),
    enabled: computed(() => resinId.value !== ''),
  })
  return computed(() => [{ value: '', label: first }, ...(query.data.value ?? []).map(item => ({ value: item.id, label: item.expiresOn === null ? item.code : `${item.code}, expires ${item.expiresOn}` }))])
}
