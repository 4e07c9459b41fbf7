import { useQueryClient } from '@tanstack/vue-query'
import { computed, reactive, ref, shallowRef, toRaw, watch, type Ref } from 'vue'
import { z } from 'zod'
import { ApiError } from '@/api/call.ts'
import { forgetFormDraft, keepFormDraft, readFormDraft } from '@/api/form-drafts.ts'
import { useSessionStore } from '@/stores/session.ts'

/** One field of a form, as people see it. */
export interface FieldSpec {
  readonly name: string
  readonly label: string
  readonly kind: 'text' | 'number' | 'date' | 'notes' | 'select'
  readonly unit?: string
  readonly hint?: string
  readonly required?: boolean
  readonly options?: readonly { readonly value: string; readonly label: string }[]
  /** An empty field means "not known". */
  readonly nullable?: boolean
}

interface Versioned {
  readonly id: string
  readonly version: number
}

/** What a form on the screen needs to know of it, whatever the thing is. */
export interface ThingFormState {
  readonly values: Record<string, unknown>
  readonly busy: Readonly<Ref<boolean>>
  readonly error: Readonly<Ref<unknown>>
  readonly stale: Readonly<Ref<object | null>>
  readonly touched: Readonly<Ref<boolean>>
  changed(): void
  save(): Promise<{ readonly id: string } | null>
  keepMine(): Promise<{ readonly id: string } | null>
  takeCurrent(): void
  errorOf(name: string): string | undefined
}

interface Options<T extends Versioned> {
  /** Where unsaved input is kept in this tab, so that a reload or a lost session costs nothing. */
  readonly draftKey: string
  readonly fields: readonly FieldSpec[]
  readonly initial: Readonly<Record<string, unknown>>
  readonly schema: z.ZodType
  readonly create: (values: Record<string, unknown>, idempotencyKey: string) => Promise<T>
  readonly update: (values: Record<string, unknown>, baseVersion: number) => Promise<T>
}

const draftSchema = z.object({
  values: z.record(z.string(), z.unknown()),
  base: z.object({ version: z.number(), values: z.record(z.string(), z.unknown()) }),
})

/** Input, checks, saving and the meeting of two edits, for every thing that people keep. */
export function useThingForm<T extends Versioned>(options: Options<T>) {
  const queries = useQueryClient()
  const draftOf = { userId: useSessionStore().user?.id ?? '', form: options.draftKey }
  const thing = shallowRef<T | null>(null)
  const values = reactive<Record<string, unknown>>({ ...options.initial })
  const busy = ref(false)
  const error = shallowRef<unknown>(null)
  const problems = ref<Record<string, string>>({})
  const stale = shallowRef<T | null>(null)
  const touched = ref(false)
  let idempotencyKey = crypto.randomUUID()
  /** What the edit began from: the version that a save names, and the values that tell what was changed. */
  let base: { version: number; values: Record<string, unknown> } = { version: 0, values: { ...options.initial } }

  const clean = (): Record<string, unknown> =>
    Object.fromEntries(options.fields.map(field => {
      const value = toRaw(values)[field.name]
      if (field.nullable === true && (value === '' || value === undefined)) return [field.name, null]
      return [field.name, value]
    }))

  /** Only what this person changed: saved over another edit, it leaves that edit's other fields alone. */
  const changes = (): Record<string, unknown> =>
    Object.fromEntries(Object.entries(clean()).filter(([name]) => toRaw(values)[name] !== base.values[name]))

  function readDraft(): void {
    const draft = draftSchema.safeParse(readFormDraft(draftOf))
    if (!draft.success) return
    Object.assign(values, draft.data.values)
    base = draft.data.base
    touched.value = true
  }

  function forgetDraft(): void {
    forgetFormDraft(draftOf)
    touched.value = false
  }

  /**
   * Shows a thing as it is stored. An edit under way stays in front and keeps the version that it began from, so that
   * saving it meets the other edit instead of overwriting it.
   */
  function show(next: T): void {
    if (touched.value && thing.value !== null) return
    thing.value = next
    for (const field of options.fields) values[field.name] = shown((next as Record<string, unknown>)[field.name], field)
    base = { version: next.version, values: { ...toRaw(values) } }
    readDraft()
  }

  const shown = (value: unknown, field: FieldSpec): unknown => (value === null && field.kind !== 'number' ? '' : value)

  function changed(): void {
    touched.value = true
    // Another content is another create: the old key would answer with the old thing.
    idempotencyKey = crypto.randomUUID()
    keepFormDraft(draftOf, { values: toRaw(values), base })
  }

  watch(values, () => {
    if (Object.keys(problems.value).length > 0) check()
  })

  function check(): boolean {
    const parsed = options.schema.safeParse(clean())
    problems.value = parsed.success ? {} : Object.fromEntries(parsed.error.issues.map(issue => [String(issue.path[0] ?? ''), friendly(issue.message)]))
    return parsed.success
  }

  const friendly = (message: string): string => (/received (null|undefined|NaN)/.test(message) || message.startsWith('Invalid input') ? 'Fill this in.' : message)

  async function save(baseVersion?: number): Promise<T | null> {
    if (busy.value || !check()) return null
    busy.value = true
    error.value = null
    try {
      const saved = thing.value === null ? await options.create(clean(), idempotencyKey) : await options.update(changes(), baseVersion ?? base.version)
      forgetDraft()
      stale.value = null
      show(saved)
      await queries.invalidateQueries()
      return saved
    } catch (failure) {
      if (failure instanceof ApiError && failure.problem.code === 'stale-edit') stale.value = failure.problem.current as T
      else error.value = failure
      return null
    } finally {
      busy.value = false
    }
  }

  /** Saves over the other version, knowingly. */
  const keepMine = (): Promise<T | null> => save(stale.value?.version)

  function takeCurrent(): void {
    const current = stale.value
    if (current === null) return
    forgetDraft()
    stale.value = null
    show(current)
  }

  const errorOf = (name: string): string | undefined => {
    if (problems.value[name] !== undefined) return problems.value[name]
    if (!(error.value instanceof ApiError)) return undefined
    return error.value.problem.fields?.find(problem => problem.path === `body.${name}`)?.sentence
  }

  if (Object.keys(options.initial).length > 0) readDraft()
  return { thing, values, busy, error, stale, touched: computed(() => touched.value), show, changed, save, keepMine, takeCurrent, errorOf, forgetDraft }
}
