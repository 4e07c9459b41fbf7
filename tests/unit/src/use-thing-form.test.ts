import { QueryClient, VueQueryPlugin } from '@tanstack/vue-query'
import { mount } from '@vue/test-utils'
import { createPinia, setActivePinia } from 'pinia'
import { beforeEach, describe, expect, it, vi } from 'vitest'
import { defineComponent } from 'vue'
import { z } from 'zod'
import { ApiError } from '@/api/call.ts'
import { useThingForm, type FieldSpec } from '@/composables/useThingForm.ts'
import { useSessionStore } from '@/stores/session.ts'

interface Thing {
  readonly id: string
  readonly version: number
  readonly name: string
  readonly notes: string
  readonly step: number | null
}

const fields: FieldSpec[] = [
  { name: 'name', label: 'Name', kind: 'text' },
  { name: 'notes', label: 'Notes', kind: 'notes' },
  { name: 'step', label: 'Step', kind: 'number' },
]
const schema = z.object({ name: z.string().min(1, 'Give it a name.'), notes: z.string(), step: z.number().nullable() })
const stored: Thing = { id: 'a', version: 1, name: 'North', notes: '', step: 0.1 }

function setUp(given: { update?: (values: Record<string, unknown>, version: number) => Promise<Thing>; initial?: Record<string, unknown>; userId?: string } = {}) {
  const pinia = createPinia()
  setActivePinia(pinia)
  useSessionStore().take({ csrfToken: 'token', user: { id: given.userId ?? 'somebody', displayName: '', email: '' }, memberships: [], mailbox: false, demoSignIns: [] })
  const update = vi.fn(given.update ?? (async (values, version) => ({ ...stored, ...values, version: version + 1 })))
  const create = vi.fn(async (values: Record<string, unknown>, _key: string) => ({ ...stored, ...values }))
  let form: ReturnType<typeof useThingForm<Thing>> | undefined
  const Host = defineComponent({
    setup() {
      form = useThingForm<Thing>({ draftKey: 'test', fields, initial: given.initial ?? {}, schema, create, update })
      return () => null
    },
  })
  const page = mount(Host, { global: { plugins: [pinia, [VueQueryPlugin, { queryClient: new QueryClient() }]] } })
  if (form === undefined) throw new Error('the form is made in setup')
  return { form, update, create, page }
}

function type(form: ReturnType<typeof useThingForm<Thing>>, name: string, value: unknown): void {
  form.values[name] = value
  form.changed()
}

const staleWith = (current: Thing) =>
  new ApiError({ type: '', title: '', status: 412, code: 'stale-edit', detail: 'Changed meanwhile.', requestId: '', current })

describe('a form', () => {
  beforeEach(() => sessionStorage.clear())

  it('sends only what was changed', async () => {
    const { form, update } = setUp()
    form.show(stored)
    type(form, 'notes', 'new film')
    await form.save()
    expect(update).toHaveBeenCalledWith({ notes: 'new film' }, 1)
  })

  it('keeps what was typed over a reload, with the version it began from', async () => {
    const first = setUp()
    first.form.show(stored)
    type(first.form, 'notes', 'half a senten')
    first.page.unmount()
    const { form, update } = setUp()
    // Somebody else saved meanwhile.
    form.show({ ...stored, version: 2, name: 'North bench' })
    expect(form.values.notes).toBe('half a senten')
    await form.save()
    expect(update).toHaveBeenCalledWith({ notes: 'half a senten' }, 1)
  })

  it('shows what one person typed to nobody else at the same tablet, and to that person again', () => {
    const first = setUp({ userId: 'somebody' })
    first.form.show(stored)
    type(first.form, 'notes', 'mine')
    first.page.unmount()
    const other = setUp({ userId: 'somebody else' })
    other.form.show(stored)
    expect(other.form.values.notes).toBe('')
    expect(other.form.touched.value).toBe(false)
    other.page.unmount()
    const again = setUp({ userId: 'somebody' })
    again.form.show(stored)
    expect(again.form.values.notes).toBe('mine')
  })

  it('shows a newer version that arrives before anything is typed, and not in the middle of typing', () => {
    const { form } = setUp()
    form.show(stored)
    form.show({ ...stored, version: 2, name: 'South' })
    expect(form.values.name).toBe('South')
    type(form, 'notes', 'typing')
    form.show({ ...stored, version: 3, name: 'West' })
    expect(form.values).toMatchObject({ name: 'South', notes: 'typing' })
  })

  it('meets another edit with both versions, and mine over it leaves their other fields alone', async () => {
    const theirs: Thing = { ...stored, version: 5, name: 'Renamed by somebody' }
    const { form, update } = setUp({
      update: async (values, version) => {
        if (version !== 5) throw staleWith(theirs)
        return { ...theirs, ...values, version: 6 }
      },
    })
    form.show(stored)
    type(form, 'notes', 'mine')
    expect(await form.save()).toBeNull()
    expect(form.stale.value).toEqual(theirs)
    expect(form.values.notes).toBe('mine')
    const saved = await form.keepMine()
    expect(update).toHaveBeenLastCalledWith({ notes: 'mine' }, 5)
    expect(saved).toMatchObject({ name: 'Renamed by somebody', notes: 'mine' })
    expect(form.values.name).toBe('Renamed by somebody')
  })

  it('takes theirs when asked, and forgets the draft', async () => {
    const theirs: Thing = { ...stored, version: 5, notes: 'theirs' }
    const { form } = setUp({ update: () => Promise.reject(staleWith(theirs)) })
    form.show(stored)
    type(form, 'notes', 'mine')
    await form.save()
    form.takeCurrent()
    expect(form.values.notes).toBe('theirs')
    expect(sessionStorage.length).toBe(0)
  })

  it('sends nothing while a field is wrong, and says which', async () => {
    const { form, create } = setUp({ initial: { name: '', notes: '', step: null } })
    expect(await form.save()).toBeNull()
    expect(create).not.toHaveBeenCalled()
    expect(form.errorOf('name')).toBe('Give it a name.')
    expect(form.errorOf('notes')).toBeUndefined()
  })

  it('retries a create with the same key, and takes a new one when the content changes', async () => {
    const { form, create } = setUp({ initial: { name: 'N', notes: '', step: null } })
    create.mockRejectedValueOnce(new Error('no answer')).mockRejectedValueOnce(new Error('no answer'))
    await form.save()
    await form.save()
    type(form, 'name', 'M')
    await form.save()
    const keys = create.mock.calls.map(([, key]) => key)
    expect(keys[0]).toBe(keys[1])
    expect(keys[2]).not.toBe(keys[0])
  })
})
