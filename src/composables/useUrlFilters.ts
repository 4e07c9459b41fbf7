import { computed, reactive, watch } from 'vue'
import { useRoute, useRouter } from 'vue-router'

/**
 * Filters of a list that live in the address: the back button works and a filtered list can be shared.
 *
 * @param defaults - name and default of each filter; a default stands in no address
 */
export function useUrlFilters<Names extends string>(defaults: Readonly<Record<Names, string>>) {
  const route = useRoute()
  const router = useRouter()
  const own = route.name

  const read = (name: Names): string => {
    const value = route.query[name]
    return typeof value === 'string' ? value : defaults[name]
  }
  const names = Object.keys(defaults) as Names[]
  const filters = reactive(Object.fromEntries(names.map(name => [name, read(name)]))) as Record<Names, string>

  watch(() => route.query, () => {
    // Leaving the page changes the address too.
    if (route.name === own) for (const name of names) filters[name] = read(name)
  })

  watch(filters, () => {
    const query = Object.fromEntries(names.filter(name => filters[name] !== defaults[name]).map(name => [name, filters[name]]))
    void router.replace({ query })
  })

  const active = computed(() => names.some(name => name !== ('sort' as Names) && filters[name] !== defaults[name]))
  function clear(): void {
    Object.assign(filters, defaults)
  }
  return { filters, active, clear }
}
