import { mount } from '@vue/test-utils'
import { describe, expect, it } from 'vitest'
import { createMemoryHistory, createRouter } from 'vue-router'
import { OfflineError } from '@/api/call.ts'
import ThingList from '@/components/things/ThingList.vue'

interface Row {
  readonly id: string
  readonly name: string
  readonly retiredAt: string | null
}
const north: Row = { id: 'a', name: 'North', retiredAt: null }

function show(given: { items?: readonly Row[]; pending?: boolean; error?: unknown; filtered?: boolean }) {
  const router = createRouter({ history: createMemoryHistory(), routes: [{ path: '/:rest(.*)*', component: { render: () => null } }] })
  return mount(ThingList<Row>, {
    props: { columns: [{ label: 'Printer', text: (row: Row) => row.name }], items: [], total: 0, pending: false, error: null, hasMore: false, loadingMore: false, filtered: false, sort: '', label: 'Printers', to: (row: Row) => `/${row.id}`, ...given },
    slots: { empty: 'Add the first.' },
    global: { plugins: [router] },
  })
}

describe('a list', () => {
  it('that could not be read again stays, below what went wrong', () => {
    const page = show({ items: [north], error: new OfflineError(null) })
    expect(page.text()).toContain('The server does not answer.')
    expect(page.get('table').text()).toContain('North')
  })

  it('that was never read says so, and not that there is nothing', () => {
    const page = show({ error: new OfflineError(null) })
    expect(page.text()).toContain('The server does not answer.')
    expect(page.text()).not.toContain('Add the first.')
  })

  it('tells an empty shop from filters that nothing fits', () => {
    expect(show({}).text()).toBe('Add the first.')
    expect(show({ filtered: true }).text()).toContain('Nothing fits these filters')
  })

  it('claims nothing while it is being read', () => {
    const page = show({ pending: true })
    expect(page.text()).not.toContain('Add the first.')
    expect(page.find('table').exists()).toBe(false)
  })
})
