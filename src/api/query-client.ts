import { QueryClient } from '@tanstack/vue-query'
import { ApiError } from './call.ts'

/** Refusals are answers: only a lost connection or a server that stumbles is asked again. */
export const queryClient = new QueryClient({
  defaultOptions: {
    queries: {
      staleTime: 10_000,
      retry: (failures, error) => failures < 2 && !(error instanceof ApiError && error.problem.status < 500),
    },
  },
})
