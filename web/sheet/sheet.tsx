import type { JSX } from 'preact'
import { useMemo, useState } from 'preact/hooks'
import type { Findings } from '../../core/contract/findings.ts'
import type { Rcd, SiteOut } from '../../core/contract/site-sheet.ts'
import { call } from '../api/call.ts'
import { apiPath } from '../api/paths.ts'
import { useFetched } from '../api/use-fetched.ts'
import { namesOf } from '../format/names.ts'
import { siteClock } from '../format/site-clock.ts'
import { HeadroomSection } from '../headroom/headroom-section.tsx'
import { LineUp } from '../line-up/line-up.tsx'
import type { Lane } from '../strip/lanes.ts'
import { tally } from '../strip/state-spans.ts'
import { Strip } from '../strip/strip.tsx'
import type { View } from '../strip/view.ts'
import { Answer } from './answer.tsx'
import { leakageChannelOf } from './missing.ts'
import { NextSteps } from './next-steps.tsx'
import { Notes } from './notes.tsx'
import { OpenMatters } from './open-matters.tsx'
import { Patterns } from './patterns.tsx'
import { TripsTable } from './trips-table.tsx'
import { useLive } from './use-live.ts'
import { useVersion } from './use-version.ts'
import { WhoseDevice } from './whose-device.tsx'

interface SheetProps {
  readonly site: SiteOut
  readonly rcd: Rcd
  /** The period asked for in the address, epoch ms; null leaves it to the program. */
  readonly from: number | null
  readonly to: number | null
  readonly onSheetChange: () => void
}

/** One device's sheet, from whose it is down to what to do next. */
export function Sheet({ site, rcd, from, to, onSheetChange }: SheetProps): JSX.Element {
  const clock = useMemo(() => siteClock(site.timeZone), [site.timeZone])
  const nameOf = useMemo(() => namesOf(site), [site])
  const channel = leakageChannelOf(site, rcd)
  const live = useLive({ site: site.id, channel, shows: (ref) => showsOn(site, rcd, ref), onSheet: onSheetChange })
  const [asked, again] = useVersion()
  const path = apiPath(['sites', site.id, 'rcds', rcd.ref, 'findings'], { from: isoOf(from), to: isoOf(to) })
  const findings = useFetched(path, asked + live.findings, (signal) => call<Findings>(path, { signal }))
  const [lastReading, setLastReading] = useState<number | null>(null)
  const [lanes, setLanes] = useState<readonly Lane[]>([])
  const [focus, setFocus] = useState<View | null>(null)
  const value = findings.value
  const shareOn = useMemo(() => {
    const shares = new Map(lanes.map((lane) => [lane.of, shareOf(lane)]))
    return (of: string): number | null => shares.get(of) ?? null
  }, [lanes])

  return (
    <article class="sheet">
      <WhoseDevice
        site={site}
        rcd={rcd}
        findings={value}
        lastReading={lastReading}
        clock={clock}
        period={from !== null || to !== null}
      />
      <OpenMatters site={site.id} version={live.matters} />
      <Answer findings={value} busy={findings.busy} error={findings.error} again={again} />
      {value !== null && (
        <>
          <Strip
            site={site}
            rcd={rcd}
            channel={channel}
            findings={value}
            clock={clock}
            nameOf={nameOf}
            live={live}
            openEnded={to === null}
            focus={focus}
            onLastReading={setLastReading}
            onLanes={setLanes}
          />
          <LineUp suspects={value.suspects} nameOf={nameOf} />
          <HeadroomSection
            headroom={value.headroom}
            budget={value.budget}
            ratedMa={rcd.ratedMa}
            nameOf={nameOf}
            shareOn={shareOn}
          />
          <TripsTable trips={value.trips} clock={clock} nameOf={nameOf} onShow={setFocus} />
          <Patterns patterns={value.patterns} />
          <NextSteps next={value.next} proof={value.proof} />
          <Notes notes={value.notes} />
        </>
      )}
    </article>
  )
}

function isoOf(t: number | null): string | null {
  return t === null ? null : new Date(t).toISOString()
}

/** Whether the readings of a channel show anywhere on this device's sheet. */
function showsOn(site: SiteOut, rcd: Rcd, ref: string): boolean {
  const channel = site.channels.find((one) => one.ref === ref)
  if (channel === undefined) return false
  if (channel.rcd !== undefined) return channel.rcd === rcd.ref
  if (channel.circuit !== undefined) return rcd.circuits.some((one) => one.ref === channel.circuit)
  if (channel.load !== undefined) return rcd.circuits.some((one) => one.loads.some((load) => load.ref === channel.load))
  return true
}

function shareOf(lane: Lane): number | null {
  const sum = tally(lane.spans)
  const known = sum.on + sum.off
  return known === 0 ? null : sum.on / known
}
