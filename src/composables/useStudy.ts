import { useMutation, useQuery, useQueryClient } from '@tanstack/vue-query'
import { computed, shallowRef } from 'vue'
import { getStudy, restoreStudy, retireStudy, studySchema, updateStudy, type Study, type StudyChange } from '#shared/contracts/studies.ts'
import { ApiError, call } from '@/api/call.ts'

export interface StudyPlace {
  readonly shopId: string
  readonly studyId: string
}

/** A change that met somebody else's: both versions, until a person chooses. */
export interface StaleStudy {
  readonly change: StudyChange
  readonly current: Study
}

/** How often the page looks whether somebody else moved the study on. */
const refetchMilliseconds = 15_000

/** One study and its changes; a stale edit keeps both versions. */
export function useStudy(place: () => StudyPlace) {
  const client = useQueryClient()
  const key = computed(() => ['study', place().shopId, place().studyId] as const)
  const stale = shallowRef<StaleStudy | null>(null)

  const query = useQuery({
    queryKey: key,
    queryFn: ({ signal }) => call(getStudy, { params: { ...place() }, signal }),
    refetchInterval: refetchMilliseconds,
    // A worker takes the study: it must be a plain object.
    shallow: true,
  })

  const save = useMutation({
    mutationFn: ({ change, baseVersion }: { change: StudyChange; baseVersion: number }) =>
      call(updateStudy, { params: { ...place() }, body: change, baseVersion }),
    onSuccess: next => {
      client.setQueryData(key.value, next)
      void client.invalidateQueries({ queryKey: ['studies'] })
    },
  })

  /** Saves a change on the version now shown; answers whether it is stored. */
  async function change(next: StudyChange, baseVersion = query.data.value?.version): Promise<boolean> {
    if (baseVersion === undefined) return false
    try {
      await save.mutateAsync({ change: next, baseVersion })
      stale.value = null
      return true
    } catch (error) {
      const current = error instanceof ApiError && error.problem.code === 'stale-edit' ? studySchema.safeParse(error.problem.current) : null
      if (current?.success !== true) return false
      stale.value = { change: next, current: current.data }
      return false
    }
  }

  /** Retires or restores the study as it is shown; answers the refusal's sentence, or null when it is done. */
  async function changeLife(operation: 'retire' | 'restore'): Promise<string | null> {
    const baseVersion = query.data.value?.version
    if (baseVersion === undefined) return 'The study is not loaded yet.'
    try {
      client.setQueryData(key.value, await call(operation === 'retire' ? retireStudy : restoreStudy, { params: { ...place() }, baseVersion }))
      void client.invalidateQueries()
      return null
    } catch (error) {
      return error instanceof Error ? error.message : 'This did not work.'
    }
  }

  const keepMine = () => (stale.value === null ? Promise.resolve(false) : change(stale.value.change, stale.value.current.version))
  function takeTheirs(): void {
    if (stale.value !== null) client.setQueryData(key.value, stale.value.current)
    stale.value = null
  }

  const failure = computed(() => (stale.value === null ? save.error.value : null))
  return { study: query.data, error: query.error, reload: () => query.refetch(), change, changeLife, saving: save.isPending, failure, stale, keepMine, takeTheirs }
}
export type StudyHandle = ReturnType<typeof useStudy>
