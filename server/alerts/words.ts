import { Temporal } from 'temporal-polyfill'
import type { Channel, MatterKind, SiteSheet } from '../../core/contract/index.ts'

/** A time as the clock on the wall of the site shows it, with the date and the offset. */
export function localTime(ms: number, zone: string): string {
  const time = Temporal.Instant.fromEpochMilliseconds(Math.round(ms)).toZonedDateTimeISO(zone)
  const clock = time.toPlainTime().toString({ smallestUnit: 'minute' })
  return `${time.toPlainDate().toString()} ${clock} (${zone})`
}

/** A length of time in one or two units. */
export function duration(ms: number): string {
  const seconds = Math.max(1, Math.round(ms / 1_000))
  if (seconds < 120) return seconds === 1 ? 'second' : `${seconds} s`
  if (seconds < 7_200) return `${Math.round(seconds / 60)} min`
  return seconds < 172_800 ? `${Math.round(seconds / 3_600)} h` : `${Math.round(seconds / 86_400)} days`
}

export function milliamps(ma: number): string {
  return `${ma.toFixed(ma < 100 ? 1 : 0)} mA`
}

export function channelName({ ref, label }: Channel): string {
  return label ? `channel ${ref} (${label})` : `channel ${ref}`
}

export function rcdName({ rcds }: SiteSheet, ref: string): string {
  const label = rcds.find((rcd) => rcd.ref === ref)?.label
  return label ? `RCD ${ref} (${label})` : `RCD ${ref}`
}

const HEADLINES: Readonly<Record<MatterKind, readonly [one: string, several: string]>> = {
  silence: ['a logger is silent', 'loggers are silent'],
  trip: ['an RCD tripped', 'RCDs tripped'],
  level: ['leakage near the trip current', 'leakage near the trip current'],
  remedy: ['a remedy is proven', 'remedies are proven'],
  test: ['a test message', 'test messages'],
}

/** The few words a message is known by. */
export function headline(kind: MatterKind, matters: number): string {
  return HEADLINES[kind][matters > 1 ? 1 : 0]
}
