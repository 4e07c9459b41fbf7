import { mount } from '@vue/test-utils'
import { describe, expect, it } from 'vitest'
import { createMemoryHistory, createRouter } from 'vue-router'
import type { ErrorCode } from '#shared/contracts/error.ts'
import { ApiError, OfflineError } from '@/api/call.ts'
import ErrorState from '@/components/base/ErrorState.vue'
import StaleEditNotice from '@/components/base/StaleEditNotice.vue'
import { routeNames } from '@/router/route-names.ts'

const button = (page: ReturnType<typeof mount>, name: string) => page.findAll('button').find(item => item.text() === name)

describe('two edits that meet', () => {
  const show = () => mount(StaleEditNotice, {
    props: {
      mine: { name: 'North bench', step: 0.05, notes: '', room: 'cellar' },
      current: { name: 'North bench', step: 0.1, notes: 'new film', room: 'cellar' },
      fields: [{ name: 'name', label: 'Name' }, { name: 'step', label: 'Exposure step', unit: 's' }, { name: 'notes', label: 'Notes' }, { name: 'room', label: 'Room' }],
    },
  })

  it('show each field in which they differ, both ways, and no other', () => {
    expect(show().findAll('tbody tr').map(row => row.findAll('th, td').map(cell => cell.text()))).toEqual([
      ['Exposure step (s)', '0.05', '0.1'],
      ['Notes', '—', 'new film'],
    ])
  })

  it('let the person keep theirs or take the other, one choice each', async () => {
    const page = show()
    await button(page, 'Save mine over it')?.trigger('click')
    expect(page.emitted()).toMatchObject({ keepMine: [[]] })
    expect(page.emitted('takeCurrent')).toBeUndefined()
    await button(page, 'Take theirs')?.trigger('click')
    expect(page.emitted('takeCurrent')).toHaveLength(1)
    expect(page.emitted('keepMine')).toHaveLength(1)
  })
})

describe('what went wrong', () => {
  const refusal = (code: ErrorCode, status: number) => new ApiError({ type: '', title: '', status, code, detail: 'Because of this.', requestId: 'request-7' })

  async function show(error: unknown, retry?: () => unknown) {
    const empty = { render: () => null }
    const router = createRouter({ history: createMemoryHistory(), routes: [{ path: '/sign-in', name: routeNames.signIn, component: empty }, { path: '/:rest(.*)*', component: empty }] })
    await router.push('/shop/1/resins/new?from=bench')
    return mount(ErrorState, { props: { error, retry }, global: { plugins: [router] } })
  }

  it('leads from a lost session through sign-in back to the very page', async () => {
    const page = await show(refusal('sign-in-required', 401))
    const link = new URL(page.get('a').attributes('href') ?? '', 'http://x')
    expect(link.pathname).toBe('/sign-in')
    expect(link.searchParams.get('then')).toBe('/shop/1/resins/new?from=bench')
  })

  it('offers no sign-in for anything else', async () => {
    for (const error of [refusal('not-allowed', 403), refusal('server-error', 500), new OfflineError(null), new Error('x')]) {
      expect((await show(error)).find('a').exists()).toBe(false)
    }
  })

  it('names the number of a failure of the server, not of a refusal', async () => {
    expect((await show(refusal('server-error', 500))).text()).toContain('request-7')
    expect((await show(refusal('name-taken', 409))).text()).not.toContain('request-7')
  })

  it('tells nothing of an inner error, and can be tried again', async () => {
    let tries = 0
    const page = await show(new Error('inner: column x'), () => { tries++ })
    expect(page.text()).not.toContain('column x')
    await button(page, 'Try again')?.trigger('click')
    expect(tries).toBe(1)
  })
})
