import { computed } from 'vue'
import { useRoute } from 'vue-router'
import type { Role } from '#shared/contracts/common.ts'
import { useSessionStore } from '@/stores/session.ts'

const keepers: readonly Role[] = ['owner', 'engineer']
const bench: readonly Role[] = ['owner', 'engineer', 'technician']

/** The shop of the address and what the person may do in it; the server decides again at each call. */
export function useShop() {
  const route = useRoute()
  const store = useSessionStore()
  const shopId = computed(() => String(route.params.shopId))
  const role = computed(() => store.roleIn(shopId.value))
  const may = (roles: readonly Role[]) => computed(() => role.value !== null && roles.includes(role.value))
  return { shopId, role, isOwner: may(['owner']), mayKeep: may(keepers), mayEnter: may(bench) }
}
