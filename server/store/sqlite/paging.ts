/** The most items of one page, whatever was asked. */
export const MAX_PAGE = 10_000

/** A place in a list, as opaque text. */
export function writeCursor(place: readonly (string | number)[]): string {
  return Buffer.from(JSON.stringify(place)).toString('base64url')
}

/** The place behind a cursor of this program; undefined when the text is none. */
export function readCursor(cursor: string): readonly unknown[] | undefined {
  try {
    const place: unknown = JSON.parse(Buffer.from(cursor, 'base64url').toString('utf8'))
    return Array.isArray(place) ? place : undefined
  } catch (error) {
    if (error instanceof SyntaxError) return undefined
    throw error
  }
}

/** The limit of a page query, made sane. */
export function pageLimit(limit: number): number {
  return Math.max(1, Math.min(MAX_PAGE, Math.floor(limit) || 1))
}
