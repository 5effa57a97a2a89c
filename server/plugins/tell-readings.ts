import type { Taken } from '../intake/taken.ts'
import type { LiveHub } from './live.ts'

/** Tells whoever listens to a site which readings arrived, by channel and span. */
export function tellReadings(live: LiveHub, site: string, { batches }: Taken): void {
  if (!live.heard(site)) return
  for (const { channel, t } of batches) {
    let from = Number.POSITIVE_INFINITY
    let to = Number.NEGATIVE_INFINITY
    for (const at of t) {
      if (at < from) from = at
      if (at > to) to = at
    }
    live.tell(site, { kind: 'readings', channel, from, to, stored: t.length })
  }
}
