import { writeInstant } from '../../core/contract/index.ts'
import type { DeliveryRecord, MatterRecord } from '../store/alert-port.ts'
import type { SiteRecord } from '../store/port.ts'
import { headline, localTime } from './words.ts'

/** What a message says, for people and for programs. */
export interface Rendered {
  readonly subject: string
  readonly text: string
  /** JSON for webhooks. */
  readonly json: string
}

/** Writes a message in plain text, times by the clock of the site. */
export function render(
  { message, kind, createdAt }: Pick<DeliveryRecord, 'message' | 'kind' | 'createdAt'>,
  matters: readonly MatterRecord[],
  { id, sheet }: SiteRecord,
): Rendered {
  const zone = sheet.timeZone
  const said = matters.map(({ text, closedAt }) =>
    closedAt === null || kind === 'test' ? text : `${text} It was over at ${localTime(closedAt, zone)}.`,
  )
  const lines = [sheet.name, '', ...said.flatMap((text) => [text, '']), `Noticed ${localTime(createdAt, zone)}.`]
  const text = `${lines.join('\n')}\n`
  const json = {
    message,
    kind,
    site: { id, name: sheet.name },
    at: writeInstant(createdAt),
    text,
    matters: matters.map((matter) => ({
      id: matter.id,
      kind: matter.kind,
      text: matter.text,
      openedAt: writeInstant(matter.openedAt),
      closedAt: matter.closedAt === null ? null : writeInstant(matter.closedAt),
      figures: matter.figures,
    })),
  }
  return { subject: `${sheet.name}: ${headline(kind, matters.length)}`, text, json: JSON.stringify(json) }
}
