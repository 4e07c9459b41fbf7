import { flushPromises, mount } from '@vue/test-utils'
import { describe, expect, it } from 'vitest'
import { defineComponent, h } from 'vue'
import { createMemoryHistory, createRouter, RouterView } from 'vue-router'
import { useUrlFilters } from '@/composables/useUrlFilters.ts'

async function openList(address: string) {
  const made: ReturnType<typeof useUrlFilters<'q' | 'state' | 'sort'>>[] = []
  const List = defineComponent({
    setup() {
      made.push(useUrlFilters({ q: '', state: 'active', sort: 'name' }))
      return () => null
    },
  })
  const router = createRouter({
    history: createMemoryHistory(),
    routes: [{ path: '/list', name: 'list', component: List }, { path: '/thing', name: 'thing', component: { render: () => null } }],
  })
  await router.push(address)
  mount({ render: () => h(RouterView) }, { global: { plugins: [router] } })
  await flushPromises()
  const newest = () => {
    const last = made.at(-1)
    if (last === undefined) throw new Error('the list is not shown')
    return last
  }
  return { router, newest }
}

describe('filters of a list', () => {
  it('come from a shared address; what it does not name stays at its default', async () => {
    const { newest } = await openList('/list?q=grey&sort=-name')
    expect(newest().filters).toEqual({ q: 'grey', state: 'active', sort: '-name' })
  })

  it('stand in the address, and a default stands in none', async () => {
    const { router, newest } = await openList('/list')
    newest().filters.q = 'north bench'
    newest().filters.state = 'retired'
    await flushPromises()
    expect(router.currentRoute.value.fullPath).toBe('/list?q=north+bench&state=retired')
    newest().filters.state = 'active'
    await flushPromises()
    expect(router.currentRoute.value.fullPath).toBe('/list?q=north+bench')
  })

  it('are there again after a thing was opened and left by Back', async () => {
    const { router, newest } = await openList('/list')
    newest().filters.q = 'grey'
    await flushPromises()
    await router.push('/thing?page=2')
    await flushPromises()
    expect(router.currentRoute.value.fullPath).toBe('/thing?page=2')
    router.back()
    await flushPromises()
    await flushPromises()
    expect(router.currentRoute.value.fullPath).toBe('/list?q=grey')
    expect(newest().filters.q).toBe('grey')
  })

  it('follow an address that changes under the list', async () => {
    const { router, newest } = await openList('/list?q=grey')
    await router.push('/list?state=all')
    await flushPromises()
    expect(newest().filters).toEqual({ q: '', state: 'all', sort: 'name' })
  })

  it('count as filters; the order does not, and clearing takes all of them away', async () => {
    const { router, newest } = await openList('/list?sort=-name')
    expect(newest().active.value).toBe(false)
    newest().filters.q = 'x'
    await flushPromises()
    expect(newest().active.value).toBe(true)
    newest().clear()
    await flushPromises()
    expect(router.currentRoute.value.fullPath).toBe('/list')
  })
})
