import { defineStore } from 'pinia'
import { computed, shallowRef } from 'vue'
import type { Role } from '#shared/contracts/common.ts'
import { getSession, signOut as signOutOperation, type Session } from '#shared/contracts/session.ts'
import { call } from '@/api/call.ts'
import { keepCsrfToken } from '@/api/csrf.ts'
import { queryClient } from '@/api/query-client.ts'

/** Who is signed in; every page and the router need it. */
export const useSessionStore = defineStore('session', () => {
  const session = shallowRef<Session | null>(null)
  let loading: Promise<Session> | null = null

  function take(next: Session): Session {
    keepCsrfToken(next.csrfToken)
    // What one person saw must not stay on the screen of the next.
    if (session.value !== null && session.value.user?.id !== next.user?.id) queryClient.clear()
    session.value = next
    return next
  }

  async function load(): Promise<Session> {
    if (session.value !== null) return session.value
    loading ??= call(getSession, {}).then(take).finally(() => {
      loading = null
    })
    return loading
  }

  async function reload(): Promise<Session> {
    return take(await call(getSession, {}))
  }

  async function signOut(): Promise<void> {
    take(await call(signOutOperation, {}))
  }

  const roleIn = (shopId: string): Role | null => session.value?.memberships.find(membership => membership.shopId === shopId)?.role ?? null

  return { session, user: computed(() => session.value?.user ?? null), memberships: computed(() => session.value?.memberships ?? []), load, reload, take, signOut, roleIn }
})
