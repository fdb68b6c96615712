import { FetchError } from 'ofetch'

export interface ApiProblem { status: number, message: string, issues: Record<string, string> }

/** What went wrong, in words for the page; `issues` by field path. */
export function describeProblem(error: unknown): ApiProblem {
  // What the page's own data failed with while the server drew it arrives as Nuxt's error, with the same status and body.
  if (error instanceof FetchError || isNuxtError(error)) {
    const body = error.data as { message?: string, data?: { issues?: { path: string, message: string }[] } } | undefined
    return {
      status: error.statusCode ?? 0,
      message: body?.message ?? (error.statusCode ? 'The server could not do this. Try again in a moment.' : 'The server cannot be reached. Check the connection and try again.'),
      issues: Object.fromEntries((body?.data?.issues ?? []).map(issue => [issue.path, issue.message])),
    }
  }
  return { status: 0, message: 'Something failed in this page. Reload it and try again.', issues: {} }
}

/** An action on the API with its state: busy, the problem when it failed, and the call itself (undefined on failure). */
export function useAction<Args extends unknown[], Result>(act: (...args: Args) => Promise<Result>) {
  const busy = ref(false)
  const problem = ref<ApiProblem | null>(null)
  async function run(...args: Args): Promise<Result | undefined> {
    if (busy.value) return undefined
    busy.value = true
    problem.value = null
    try {
      return await act(...args)
    } catch (error) {
      problem.value = describeProblem(error)
      if (problem.value.status === 401) await useUserSession().fetch()
      return undefined
    } finally {
      busy.value = false
    }
  }
  return { busy, problem, run }
}
