import { flushPromises, mount } from '@vue/test-utils'
import { describe, expect, it, vi } from 'vitest'
import { reactive, ref } from 'vue'
import ThingForm from '@/components/things/ThingForm.vue'
import type { FieldSpec } from '@/composables/useThingForm.ts'

const fields: readonly FieldSpec[] = [{ name: 'name', label: 'Name', kind: 'text' }, { name: 'irradiance', label: 'Irradiance', unit: 'mW/cm²', kind: 'number' }]

function show() {
  const values = reactive<Record<string, unknown>>({ name: 'North', irradiance: 6.1 })
  const save = vi.fn(async () => ({ id: 'a' }))
  const form = { values, busy: ref(false), error: ref(null), stale: ref(null), touched: ref(false), changed: () => undefined, save, keepMine: save, takeCurrent: () => undefined, errorOf: () => undefined }
  const page = mount(ThingForm, { props: { fields, form, saveLabel: 'Save' }, attachTo: document.body })
  const box = page.get<HTMLInputElement>('.number-input')
  return { values, save, page, box, submit: () => page.get('form').trigger('submit').then(flushPromises) }
}

describe('a number that nobody can read', () => {
  it('is not saved as none: the box keeps it, says so and gets the focus', async () => {
    const { save, page, box, submit } = show()
    await box.setValue('6.2 mW')
    await submit()
    expect(save).not.toHaveBeenCalled()
    expect(box.element.value).toBe('6.2 mW')
    expect(page.text()).toContain('This is not a number.')
    expect(document.activeElement).toBe(box.element)
    page.unmount()
  })

  it.each([['6,2', 6.2], [' 7 ', 7], ['', null]])('is told from %j, which is saved as %j', async (typed, value) => {
    const { values, save, page, box, submit } = show()
    await box.setValue('none')
    await box.setValue(typed)
    await submit()
    expect(save).toHaveBeenCalledTimes(1)
    expect(values.irradiance).toBe(value)
    page.unmount()
  })

  it('is forgotten when the other version is taken', async () => {
    const { values, save, page, box, submit } = show()
    await box.setValue('6.2 mW')
    values.irradiance = 5
    await flushPromises()
    expect(box.element.value).toBe('5')
    expect(page.text()).not.toContain('This is not a number.')
    await submit()
    expect(save).toHaveBeenCalledTimes(1)
    page.unmount()
  })
})
