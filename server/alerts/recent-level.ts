import type { SiteSheet } from '../../core/contract/index.ts'
import { median } from '../../core/statistics/median.ts'
import type { StoreReader } from '../store/port.ts'

const WINDOW_MS = 5 * 60_000

/** The channel whose readings tell the level of a device; undefined without one. */
export function levelChannel(sheet: SiteSheet, rcd: string): string | undefined {
  return sheet.channels.find(
    (channel) =>
      channel.quantity === 'leakage' &&
      channel.rcd === rcd &&
      (channel.reading === undefined || channel.reading === 'rms'),
  )?.ref
}

/** Median of the last five minutes of a channel, mA: one kick of a reading is no level. Undefined without readings. */
export async function recentLevel(
  store: Pick<StoreReader, 'extents' | 'readings'>,
  site: string,
  channel: string,
): Promise<number | undefined> {
  const extent = (await store.extents(site)).find((one) => one.channel === channel)
  if (extent === undefined) return undefined
  const { v } = await store.readings(site, channel, extent.last - WINDOW_MS + 1, extent.last + 1)
  return v.length === 0 ? undefined : median(v.map(Math.abs))
}
