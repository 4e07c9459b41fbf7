import { useQuery } from '@tanstack/vue-query'
import { computed, type ComputedRef } from 'vue'
import { call } from '@/api/call.ts'
import { printers, resins } from '@/api/things.ts'

type Options = ComputedRef<{ value: string; label: string }[]>

/** The printers of a shop to choose from; `first` stands for none. */
export function usePrinterOptions(shopId: ComputedRef<string>, first: string): Options {
  const query = useQuery({
    queryKey: computed(() => ['printer-options', shopId.value]),
    queryFn: () => call(printers.listPrinters, { params: { shopId: shopId.value }, query: { limit: 200 } }),
  })
  return computed(() => [{ value: '', label: first }, ...(query.data.value?.items ?? []).map(item => ({ value: item.id, label: item.name }))])
}

/** The resins of a shop to choose from. */
export function useResinOptions(shopId: ComputedRef<string>, first: string): Options {
  const query = useQuery({
    queryKey: computed(() => ['resin-options', shopId.value]),
    queryFn: () => call(resins.listResins, { params: { shopId: shopId.value }, query: { limit: 200 } }),
  })
  return computed(() => [{ value: '', label: first }, ...(query.data.value?.items ?? []).map(item => ({ value: item.id, label: item.name }))])
}

/** The lots of a resin to choose from. */
export function useLotOptions(shopId: ComputedRef<string>, resinId: ComputedRef<string>, first: string): Options {
  const query = useQuery({
    queryKey: computed(() => ['lot-options', shopId.value, resinId.value]),
    queryFn: () => call(resins.listLots, { params: { shopId: shopId.value }, query: { limit: 200, resinId: resinId.value } }),
    enabled: computed(() => resinId.value !== ''),
  })
  return computed(() => [{ value: '', label: first }, ...(query.data.value?.items ?? []).map(item => ({ value: item.id, label: item.expiresOn === null ? item.code : `${item.code}, expires ${item.expiresOn}` }))])
}
