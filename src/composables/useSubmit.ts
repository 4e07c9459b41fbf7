import { readonly, ref, shallowRef } from 'vue'
import { ApiError } from '@/api/call.ts'

/** One form being sent: busy while it goes, what was refused when it comes back, per field where the server says so. */
export function useSubmit() {
  const busy = ref(false)
  const error = shallowRef<unknown>(null)

  async function submit(work: () => Promise<void>): Promise<boolean> {
    if (busy.value) return false
    busy.value = true
    error.value = null
    try {
      await work()
      return true
    } catch (failure) {
      error.value = failure
      return false
    } finally {
      busy.value = false
    }
  }

  /** The server's sentence for one field. */
  function errorOf(field: string): string | undefined {
    if (!(error.value instanceof ApiError)) return undefined
    return error.value.problem.fields?.find(problem => problem.path.replace(/^body\./, '') === field)?.sentence
  }

  return { busy: readonly(busy), error, submit, errorOf }
}
