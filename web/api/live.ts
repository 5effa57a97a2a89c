/** What the live stream told. */
export type LiveNews =
  | { readonly kind: 'readings'; readonly channel: string; readonly to: number | null }
  | { readonly kind: 'records' }
  | { readonly kind: 'sheet' }
  /** Something was noticed, or is over. */
  | { readonly kind: 'matters' }

/**
 * Listens to what arrives at a site until the returned function is called. The browser reconnects by itself; `onState`
 * says whether the stream is up.
 */
export function listenLive(site: string, onNews: (news: LiveNews) => void, onState: (up: boolean) => void): () => void {
  const source = new EventSource(`/api/sites/${encodeURIComponent(site)}/live`)
  source.onopen = () => onState(true)
  source.onerror = () => onState(false)
  source.addEventListener('readings', (event) => onNews(readingsNews(event.data)))
  source.addEventListener('records', () => onNews({ kind: 'records' }))
  source.addEventListener('sheet', () => onNews({ kind: 'sheet' }))
  source.addEventListener('matters', () => onNews({ kind: 'matters' }))
  return () => source.close()
}

/** Reads the data of a `readings` event: `{ channel, from, to, stored }`. What is unreadable names no channel. */
export function readingsNews(data: unknown): LiveNews & { kind: 'readings' } {
  let told: unknown
  try {
    told = JSON.parse(String(data))
  } catch (error) {
    if (!(error instanceof SyntaxError)) throw error
  }
  const { channel, to } = (typeof told === 'object' && told !== null ? told : {}) as { channel?: unknown; to?: unknown }
  return {
    kind: 'readings',
    channel: typeof channel === 'string' ? channel : '',
    to: typeof to === 'number' ? to : null,
  }
}
