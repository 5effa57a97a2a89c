import type { Problem } from '../../core/contract/problem.ts'
import { words } from '../words.ts'

/** Why a call did not work out: the server's own words where it gave any. `status` 0 means that nothing answered. */
export class CallError extends Error {
  readonly status: number
  readonly problem: Problem | null

  constructor(status: number, message: string, problem: Problem | null = null) {
    super(message)
    this.name = 'CallError'
    this.status = status
    this.problem = problem
  }
}

export interface CallOptions {
  readonly method?: 'GET' | 'POST' | 'DELETE'
  readonly body?: unknown
  readonly signal?: AbortSignal | undefined
}

/**
 * Calls the public API and gives the JSON of its answer (undefined for 204). Calls that change something carry the
 * header that another site's form cannot set.
 * @throws {CallError} for every answer that is no success, and when nothing answers
 */
export async function call<T>(path: string, options: CallOptions = {}): Promise<T> {
  const method = options.method ?? 'GET'
  const headers = new Headers({ accept: 'application/json, application/problem+json' })
  if (method !== 'GET') headers.set('x-leaktide', 'page')
  const init: RequestInit = { method, headers, credentials: 'same-origin' }
  if (options.body !== undefined) {
    headers.set('content-type', 'application/json')
    init.body = JSON.stringify(options.body)
  }
  if (options.signal) init.signal = options.signal
  const answer = await fetch(`/api${path}`, init).catch((error: unknown) => {
    if (isAbort(error)) throw error
    throw new CallError(0, words.trouble.unreachable)
  })
  if (answer.status === 204) return undefined as T
  const body: unknown = await answer.json().catch((error: unknown) => {
    // given up, or the network went, while the body came: no answer at all, never an empty one
    if (isAbort(error)) throw error
    if (answer.ok) throw new CallError(0, words.trouble.unreachable)
    return null
  })
  if (answer.ok) return body as T
  const problem = isProblem(body) ? body : null
  throw new CallError(answer.status, problem?.detail ?? words.trouble.status(answer.status), problem)
}

/** True for the rejection of a call that the page itself gave up. */
export function isAbort(error: unknown): boolean {
  return error instanceof DOMException && error.name === 'AbortError'
}

function isProblem(body: unknown): body is Problem {
  return typeof body === 'object' && body !== null && 'detail' in body && 'title' in body
}
