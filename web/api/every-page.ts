import { call } from './call.ts'

/** A page of a list as the API answers it. */
export interface ListPage<T> {
  readonly items: readonly T[]
  readonly next: string | null
}

/** The most pages one list is followed for; a longer list is cut and the caller told. */
const MOST_PAGES = 20

/** All items of a paged list, page after page. `cut` is true when the list goes on beyond what was fetched. */
export async function everyPage<T>(path: string, signal?: AbortSignal): Promise<{ items: T[]; cut: boolean }> {
  const items: T[] = []
  let after: string | null = null
  for (let page = 0; page < MOST_PAGES; page++) {
    const joint: string = path.includes('?') ? '&' : '?'
    const answer: ListPage<T> = await call<ListPage<T>>(
      after === null ? path : `${path}${joint}after=${encodeURIComponent(after)}`,
      { signal },
    )
    items.push(...answer.items)
    after = answer.next
    if (after === null) return { items, cut: false }
  }
  return { items, cut: true }
}
