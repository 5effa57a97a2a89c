/** An instant as a `datetime-local` field writes it, in the clock of this phone or computer. */
export function toField(t: number): string {
  const local = new Date(t - new Date(t).getTimezoneOffset() * 60_000)
  return local.toISOString().slice(0, 16)
}

/** The instant of a filled field; null for an empty or unreadable one. */
export function fromField(text: string): number | null {
  const t = new Date(text).getTime()
  return text === '' || Number.isNaN(t) ? null : t
}
