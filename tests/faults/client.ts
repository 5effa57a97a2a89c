import { OWNER_KEY } from './server-process.ts'

/** An answer that came whole; `undefined` when the connection broke before. */
export type Answer<T> = { readonly status: number; readonly body: T } | undefined

/** Speaks JSON with a server that may die at any moment. */
export class Client {
  private readonly base: string

  constructor(url: string) {
    this.base = `${url.replace(/\/$/, '')}/api`
  }

  async post<T>(path: string, body: unknown): Promise<Answer<T>> {
    return this.ask(path, {
      method: 'POST',
      headers: { authorization: `Bearer ${OWNER_KEY}`, 'content-type': 'application/json' },
      body: JSON.stringify(body),
    })
  }

  async get<T>(path: string): Promise<T> {
    const answer = await this.ask<T>(path, { headers: { authorization: `Bearer ${OWNER_KEY}` } })
    if (answer?.status !== 200) throw new Error(`GET ${path} answered ${JSON.stringify(answer)}`)
    return answer.body
  }

  /** Everything stored of one channel, as [time, value] in the order of the answer. */
  async readings(site: string, channel: string): Promise<[number, number][]> {
    const span = 'from=2026-01-01T00:00:00Z&to=2027-01-01T00:00:00Z'
    const response = await fetch(`${this.base}/sites/${site}/channels/${channel}/readings?${span}`, {
      headers: { authorization: `Bearer ${OWNER_KEY}`, accept: 'application/x-ndjson' },
    })
    if (response.status !== 200) throw new Error(`readings answered ${response.status}: ${await response.text()}`)
    const lines = (await response.text()).split('\n').filter((line) => line !== '')
    return lines.map((line) => {
      const { t, v } = JSON.parse(line) as { t: number; v: number }
      return [t, v]
    })
  }

  /** Every item of a list, page after page. */
  async list<T>(path: string): Promise<T[]> {
    const items: T[] = []
    for (let next: string | null = ''; next !== null; ) {
      const after: string = next === '' ? '' : `&after=${encodeURIComponent(next)}`
      const page: { items: T[]; next: string | null } = await this.get(`${path}?limit=100${after}`)
      items.push(...page.items)
      next = page.next
    }
    return items
  }

  private async ask<T>(path: string, init: RequestInit): Promise<Answer<T>> {
    try {
      const response = await fetch(this.base + path, init)
      return { status: response.status, body: (await response.json()) as T }
    } catch (error) {
      if (error instanceof TypeError) return undefined // what fetch throws when the connection breaks
      throw error
    }
  }
}
