import type Database from 'better-sqlite3'
import type { DeliveryRecord, DeliveryState, MatterRecord } from '../alert-port.ts'

export interface MatterRow extends Omit<MatterRecord, 'figures' | 'deliveries' | 'kind'> {
  readonly num: number
  readonly kind: string
  readonly figures: string
}

export interface DeliveryRow extends Omit<DeliveryRecord, 'matters'> {
  readonly messageNum: number
}

const MATTER = 'num, id, key, kind, opened_at AS openedAt, closed_at AS closedAt, text, figures'
const STATE = `way, target, state, attempts, next_at AS nextAt, tried_at AS triedAt, done_at AS doneAt, error`
const DELIVERY = `SELECT alert_delivery.num, alert_message.num AS messageNum, alert_message.id AS message, site.id AS site,
  kind, alert_message.created_at AS createdAt, ${STATE} FROM alert_delivery
  JOIN alert_message ON alert_message.num = alert_delivery.message JOIN site ON site.num = alert_message.site`

/** The statements of the alert tables. */
export function alertStatements(db: Database.Database) {
  return {
    settings: db.prepare<[number], { readonly body: string; readonly secret: string | null; readonly since: number }>(
      'SELECT body, webhook_secret AS secret, since FROM alert_settings WHERE site = ?',
    ),
    saveSettings: db.prepare<[number, string, string | null, number, number, string]>(
      `INSERT INTO alert_settings (site, body, webhook_secret, since, updated_at, updated_by) VALUES (?, ?, ?, ?, ?, ?)
       ON CONFLICT (site) DO UPDATE SET body = excluded.body, webhook_secret = excluded.webhook_secret,
       updated_at = excluded.updated_at, updated_by = excluded.updated_by`,
    ),
    sitesWithSettings: db
      .prepare<[], string>('SELECT id FROM site JOIN alert_settings ON alert_settings.site = site.num ORDER BY num')
      .pluck(),
    mattersSince: db.prepare<[number, number], MatterRow>(
      `SELECT ${MATTER} FROM matter WHERE site = ? AND (closed_at IS NULL OR opened_at >= ?) ORDER BY num`,
    ),
    mattersById: db.prepare<[number, string], MatterRow>(
      `SELECT ${MATTER} FROM matter WHERE site = ? AND id IN (SELECT value FROM json_each(?)) ORDER BY num`,
    ),
    matters: db.prepare<[number, number, number | null, number | null, number], MatterRow>(
      `SELECT ${MATTER} FROM matter WHERE site = ? AND num < ? AND (? IS NULL OR (closed_at IS NULL) = ?)
       ORDER BY num DESC LIMIT ?`,
    ),
    openCounts: db
      .prepare<[string], [string, number]>(
        `SELECT site.id, count(*) FROM matter JOIN site ON site.num = matter.site
         WHERE closed_at IS NULL AND kind IN ('silence', 'trip', 'level')
         AND site.id IN (SELECT value FROM json_each(?)) GROUP BY site.num`,
      )
      .raw(),
    open: db.prepare(
      `INSERT INTO matter (id, site, key, kind, opened_at, text, figures)
       VALUES (@id, @site, @key, @kind, @openedAt, @text, @figures)
       ON CONFLICT (site, key) WHERE closed_at IS NULL DO NOTHING`,
    ),
    close: db.prepare<[number, number, string]>(
      'UPDATE matter SET closed_at = ? WHERE site = ? AND id = ? AND closed_at IS NULL',
    ),
    addMessage: db.prepare<[string, number, string, number]>(
      'INSERT INTO alert_message (id, site, kind, created_at) VALUES (?, ?, ?, ?)',
    ),
    addMessageMatter: db.prepare<[number, number]>('INSERT INTO alert_message_matter (message, matter) VALUES (?, ?)'),
    addDelivery: db.prepare<[number, string, string, number]>(
      `INSERT INTO alert_delivery (message, way, target, state, next_at) VALUES (?, ?, ?, 'waiting', ?)`,
    ),
    due: db.prepare<[number, number, number], DeliveryRow>(
      `${DELIVERY} WHERE state = 'waiting' AND (next_at <= ? OR next_at > ?) ORDER BY next_at, alert_delivery.num LIMIT ?`,
    ),
    attempted: db.prepare<[string, number, number, number | null, string | null, number]>(
      `UPDATE alert_delivery SET state = ?, attempts = attempts + 1, next_at = ?, tried_at = ?, done_at = ?, error = ?
       WHERE num = ? AND state = 'waiting'`,
    ),
    deliveries: db.prepare<[number, number, number], DeliveryRow>(
      `${DELIVERY} WHERE alert_message.site = ? AND alert_delivery.num < ? ORDER BY alert_delivery.num DESC LIMIT ?`,
    ),
    deliveriesOfMatter: db.prepare<[number], DeliveryState>(
      `SELECT ${STATE} FROM alert_delivery WHERE message IN
       (SELECT message FROM alert_message_matter WHERE matter = ?) ORDER BY num`,
    ),
    mattersOfMessage: db
      .prepare<[number], string>(
        `SELECT matter.id FROM alert_message_matter JOIN matter ON matter.num = alert_message_matter.matter
         WHERE alert_message_matter.message = ? ORDER BY matter.num`,
      )
      .pluck(),
    forgetMessages: db.prepare<[number]>(
      `DELETE FROM alert_message WHERE created_at < ? AND NOT EXISTS
       (SELECT 1 FROM alert_delivery WHERE message = alert_message.num AND state = 'waiting')`,
    ),
    forgetMatters: db.prepare<[number]>(
      `DELETE FROM matter WHERE closed_at < ? AND NOT EXISTS
       (SELECT 1 FROM alert_message_matter WHERE matter = matter.num)`,
    ),
    paces: db.prepare<[], { readonly site: string; readonly channel: string; readonly gapMs: number }>(
      'SELECT site.id AS site, channel, gap_ms AS gapMs FROM posting_pace JOIN site ON site.num = posting_pace.site',
    ),
    savePace: db.prepare<[string, number, string]>(
      `INSERT INTO posting_pace (site, channel, gap_ms) SELECT num, ?, ? FROM site WHERE id = ?
       ON CONFLICT (site, channel) DO UPDATE SET gap_ms = excluded.gap_ms`,
    ),
  }
}
