import type { AlertSettings, MatterKind } from '../../core/contract/index.ts'
import type { AlertWay, MatterChange, MatterRecord, NewMatter, NewMessage } from '../store/alert-port.ts'
import type { Noticed } from './notice.ts'

/** Where messages of a site go. */
export function waysOf({
  email,
  webhook,
}: AlertSettings): readonly { readonly way: AlertWay; readonly target: string }[] {
  return [
    ...(email?.to ?? []).map((target) => ({ way: 'email' as const, target })),
    ...(webhook === null ? [] : [{ way: 'webhook' as const, target: webhook.url }]),
  ]
}

/**
 * What changes by what was noticed: matters that open and close, and one message for all of a kind that open together,
 * where the site wants to be told. A matter that is open already is no news. After many messages of a kind within an hour
 * what is new waits, and makes one message together: whoever may write trips down must not flood a mailbox.
 * Undefined when nothing changes.
 */
export function planChange(
  known: readonly MatterRecord[],
  noticed: readonly Noticed[],
  settings: AlertSettings,
  now: number,
  newId: () => string,
): MatterChange | undefined {
  const openByKey = new Map(known.filter(({ closedAt }) => closedAt === null).map((matter) => [matter.key, matter.id]))
  const over = noticed.flatMap((one) => one.over)
  const close = over.flatMap((key) => {
    const id = openByKey.get(key)
    return id === undefined ? [] : [{ id, at: now }]
  })
  const tooMany = kindsToldOften(known, now)
  const open: NewMatter[] = noticed
    .flatMap(({ notices }) => notices)
    .filter(({ key, kind }) => !openByKey.has(key) && !tooMany.has(kind))
    .map((notice) => ({ ...notice, id: newId(), openedAt: now }))
  if (open.length === 0 && close.length === 0) return undefined
  const to = waysOf(settings)
  const kinds = new Set(open.map(({ kind }) => kind).filter((kind) => wants(settings, kind)))
  const messages = [...kinds].map(
    (kind): NewMessage => ({
      id: newId(),
      kind,
      createdAt: now,
      matters: open.filter((matter) => matter.kind === kind).map(({ id }) => id),
      to,
    }),
  )
  return { open, close, messages: to.length === 0 ? [] : messages }
}

const HOUR_MS = 3_600_000
const MOST_AN_HOUR = 20

/** Kinds of which so many matters opened within the last hour, those of one moment counted as one. */
function kindsToldOften(known: readonly MatterRecord[], now: number): ReadonlySet<MatterKind> {
  const moments = new Map<MatterKind, Set<number>>()
  for (const { kind, openedAt } of known) {
    if (openedAt > now || openedAt <= now - HOUR_MS) continue
    moments.set(kind, (moments.get(kind) ?? new Set()).add(openedAt))
  }
  return new Set([...moments].filter(([, times]) => times.size >= MOST_AN_HOUR).map(([kind]) => kind))
}

function wants({ about }: AlertSettings, kind: MatterKind): boolean {
  return kind === 'test' || about[kind]
}
