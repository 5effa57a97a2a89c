import type { AlertSettings, SiteSheet } from '../../core/contract/index.ts'
import type { Watched } from './arrivals.ts'
import type { Noticed, OpenMatter } from './notice.ts'
import { channelName, duration, localTime } from './words.ts'

/** A silence is noticed after so many usual intervals: with the time until somebody looks it stays within three. */
const INTERVALS = 2.5

/** Channels that stopped posting, and those that are back. A channel that is no longer on the sheet is not waited for. */
export function noticeSilence(
  sheet: SiteSheet,
  watched: readonly Watched[],
  settings: AlertSettings['silence'],
  open: readonly OpenMatter[],
): Noticed {
  const silent = new Map(watched.filter((one) => isSilent(one, settings)).map((one) => [one.channel, one]))
  const listed = sheet.channels.filter(({ ref }) => silent.has(ref))
  const notices = listed.map((channel) => {
    const { everyMs, lastAt } = silent.get(channel.ref)!
    const every = expectedMs(channel.ref, everyMs, settings)
    const since = lastAt === null ? 'since the server started' : `since ${localTime(lastAt, sheet.timeZone)}`
    const usual = every === null ? '' : ` It usually posts every ${duration(every)}.`
    return {
      key: `silence/${channel.ref}`,
      kind: 'silence' as const,
      text: `Nothing has come from ${channelName(channel)} ${since}.${usual}`,
      figures: { channel: channel.ref, lastAt, everySeconds: every === null ? null : every / 1_000 },
    }
  })
  const still = new Set(notices.map(({ key }) => key))
  const over = open.filter(({ kind, key }) => kind === 'silence' && !still.has(key)).map(({ key }) => key)
  return { notices, over: over.filter((key) => isBack(key, watched, sheet, silent, settings)) }
}

/** Over when it posted again, or is not waited for any more. */
function isBack(
  key: string,
  watched: readonly Watched[],
  sheet: SiteSheet,
  silent: ReadonlyMap<string, Watched>,
  settings: AlertSettings['silence'],
): boolean {
  const ref = key.slice('silence/'.length)
  if (!sheet.channels.some((channel) => channel.ref === ref) || settings.everySeconds[ref] === null) return true
  const one = watched.find(({ channel }) => channel === ref)
  // Not heard of since the server started: the silence goes on.
  return one !== undefined && one.lastAt !== null && !silent.has(ref)
}

function isSilent({ channel, silentMs, everyMs }: Watched, settings: AlertSettings['silence']): boolean {
  const every = expectedMs(channel, everyMs, settings)
  return every !== null && silentMs > Math.max(INTERVALS * every, settings.leastSeconds * 1_000)
}

function expectedMs(
  channel: string,
  everyMs: number | null,
  { everySeconds }: AlertSettings['silence'],
): number | null {
  if (!Object.hasOwn(everySeconds, channel)) return everyMs
  const set = everySeconds[channel]
  return set === null || set === undefined ? null : set * 1_000
}
