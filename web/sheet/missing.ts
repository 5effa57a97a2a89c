import type { Findings } from '../../core/contract/findings.ts'
import type { Rcd, SiteOut } from '../../core/contract/site-sheet.ts'
import { words } from '../words.ts'

/** What is missing to answer better, in sentences; most important first. */
export function missingOf(site: SiteOut, rcd: Rcd, findings: Findings | null): string[] {
  const say = words.missing
  const list: string[] = []
  if (leakageChannelOf(site, rcd) === null) list.push(say.noLeakage)
  if (findings !== null && findings.headroom.tripMa.basis !== 'ramp-tests' && rcd.rampTripMa === undefined) {
    list.push(say.noRamp)
  }
  const loads = rcd.circuits.flatMap((circuit) => circuit.loads.map((load) => load.ref))
  const watched = new Set(site.channels.filter((one) => one.quantity === 'running').map((one) => one.load))
  const unwatched = loads.filter((ref) => !watched.has(ref))
  if (loads.length === 0) list.push(say.noLoads)
  else if (unwatched.length > 0) list.push(say.unwatched(unwatched.length, loads.length))
  if (findings !== null) {
    const { energisedHours, readingHours } = findings.coverage
    if (energisedHours > 0 && readingHours < 0.98 * energisedHours) {
      list.push(say.hours(readingHours, energisedHours))
    }
  }
  if (site.channels.every((one) => one.quantity !== 'rain')) list.push(say.noRain)
  return list
}

/** The channel whose trace stands for the device: r.m.s. leakage of the whole group, else the first leakage on it. */
export function leakageChannelOf(site: Pick<SiteOut, 'channels'>, rcd: Pick<Rcd, 'ref'>): string | null {
  const own = site.channels.filter((one) => one.quantity === 'leakage' && one.rcd === rcd.ref)
  return (own.find((one) => (one.reading ?? 'rms') === 'rms') ?? own[0])?.ref ?? null
}
