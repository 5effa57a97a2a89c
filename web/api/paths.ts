/** Paths of the API below `/api`, each part encoded. */
export function apiPath(
  parts: readonly string[],
  query: Readonly<Record<string, string | number | null>> = {},
): string {
  const search = new URLSearchParams()
  for (const [name, value] of Object.entries(query)) {
    if (value !== null) search.set(name, String(value))
  }
  const tail = search.size > 0 ? `?${search}` : ''
  return `/${parts.map(encodeURIComponent).join('/')}${tail}`
}
