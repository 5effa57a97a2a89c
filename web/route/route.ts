/** Which page an address means. */
export type Route =
  | { readonly page: 'sites' }
  | {
      readonly page: 'sheet'
      readonly site: string
      readonly rcd: string | null
      readonly from: number | null
      readonly to: number | null
    }
  | { readonly page: 'report'; readonly rcd: string | null }
  | { readonly page: 'nowhere' }

/** Reads path and query: `/`, `/sites/ID?rcd=A&from=…&to=…`, `/report?rcd=A`. Times are epoch ms or RFC 3339. */
export function readRoute(pathname: string, search: string): Route {
  const query = new URLSearchParams(search)
  const parts = pathname.split('/').filter((part) => part !== '')
  if (parts.length === 0) return { page: 'sites' }
  if (parts.length === 1 && parts[0] === 'report') return { page: 'report', rcd: query.get('rcd') }
  if (parts.length === 2 && parts[0] === 'sites') {
    const from = readTime(query.get('from'))
    const to = readTime(query.get('to'))
    const ordered = from === null || to === null || from < to
    return {
      page: 'sheet',
      site: decode(parts[1]!),
      rcd: query.get('rcd'),
      from: ordered ? from : null,
      to: ordered ? to : null,
    }
  }
  return { page: 'nowhere' }
}

/** The address of a site's sheet. */
export function sheetAddress(site: string, rcd?: string | null, from?: number | null, to?: number | null): string {
  const query = new URLSearchParams()
  if (rcd) query.set('rcd', rcd)
  if (from != null) query.set('from', new Date(from).toISOString())
  if (to != null) query.set('to', new Date(to).toISOString())
  return `/sites/${encodeURIComponent(site)}${query.size > 0 ? `?${query}` : ''}`
}

function readTime(text: string | null): number | null {
  if (text === null || text === '') return null
  const ms = /^\d+$/.test(text) ? Number(text) : Date.parse(text)
  return Number.isFinite(ms) ? ms : null
}

function decode(part: string): string {
  try {
    return decodeURIComponent(part)
  } catch (error) {
    if (error instanceof URIError) return part
    throw error
  }
}
