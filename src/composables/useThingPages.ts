import { useInfiniteQuery } from '@tanstack/vue-query'
import { computed, type ComputedRef } from 'vue'

interface Page<T> {
  readonly items: readonly T[]
  readonly nextCursor: string | null
  readonly total: number
}

/** A list that grows page by page. */
export function useThingPages<T>(options: {
  readonly key: ComputedRef<readonly unknown[]>
  readonly load: (cursor: string | undefined) => Promise<Page<T>>
}) {
  const query = useInfiniteQuery({
    queryKey: options.key,
    queryFn: ({ pageParam }: { pageParam: string | undefined }) => options.load(pageParam),
    initialPageParam: undefined,
    getNextPageParam: (last: Page<T>) => last.nextCursor ?? undefined,
    placeholderData: previous => previous,
  })
  const items = computed(() => query.data.value?.pages.flatMap(page => page.items) ?? [])
  const total = computed(() => query.data.value?.pages[0]?.total ?? 0)
  return { query, items, total }
}
