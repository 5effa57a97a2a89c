import type { JSX } from 'preact'
import { useEffect, useMemo, useRef, useState } from 'preact/hooks'
import type { Findings } from '../../core/contract/findings.ts'
import type { Trace } from '../../core/contract/readings.ts'
import type { Rcd, SiteOut } from '../../core/contract/site-sheet.ts'
import { nightSpans } from '../../core/timeline/sun.ts'
import { milliampRange, milliamps } from '../format/numbers.ts'
import type { SiteClock } from '../format/site-clock.ts'
import { Loading } from '../frame/loading.tsx'
import { Trouble } from '../frame/trouble.tsx'
import type { Live } from '../sheet/use-live.ts'
import { useVersion } from '../sheet/use-version.ts'
import { words } from '../words.ts'
import type { Marks } from './draw-marks.ts'
import { FlagRow } from './flag-row.tsx'
import { gapsOf } from './gaps.ts'
import { labelWidth } from './label-width.ts'
import { LaneList } from './lane-list.tsx'
import { type Lane, lanesOf } from './lanes.ts'
import { usePalette } from './palette.ts'
import { Readout } from './readout.tsx'
import { topOfScale } from './scale.ts'
import { StripControls } from './strip-controls.tsx'
import { TracePlot } from './trace-plot.tsx'
import { marksOf } from './trip-marks.ts'
import { useGestures } from './use-gestures.ts'
import { useRecords } from './use-records.ts'
import { useTraces } from './use-traces.ts'
import { useView } from './use-view.ts'
import { useWhole } from './use-whole.ts'
import { useWidth } from './use-width.ts'
import { type View, xOf } from './view.ts'

interface StripProps {
  readonly site: SiteOut
  readonly rcd: Rcd
  readonly channel: string | null
  readonly findings: Findings
  readonly clock: SiteClock
  readonly nameOf: (of: string) => string
  readonly live: Live
  readonly openEnded: boolean
  /** A stretch that another part of the sheet wants shown. */
  readonly focus: View | null
  readonly onLastReading: (t: number | null) => void
  readonly onLanes: (lanes: readonly Lane[]) => void
}

const WIDE = 760
const RIGHT = 10
const NONE: readonly string[] = []

/** The whole period on one time axis: leakage, trips, circuits, loads, weather. */
export function Strip(props: StripProps): JSX.Element {
  const { site, rcd, channel, findings, clock, nameOf, live } = props
  const say = words.strip
  const palette = usePalette()
  const [holder, width] = useWidth<HTMLDivElement>()
  const section = useRef<HTMLElement>(null)
  const [retry, again] = useVersion()
  const [cursor, setCursor] = useState<number | null>(null)
  const { from, to } = findings
  const whole = useWhole(Date.parse(from), Date.parse(to), props.openEnded ? live.latest : null)
  const [view, setView] = useView(whole, props.focus)
  useEffect(() => {
    if (props.focus === null) return
    section.current?.scrollIntoView({ block: 'start' })
    section.current?.querySelector<HTMLElement>('.strip-hand')?.focus({ preventScroll: true })
  }, [props.focus])

  const wide = width >= WIDE
  const gutter = wide ? labelWidth(labelsOf(rcd, nameOf)) : 38
  const plotWidth = Math.max(0, width - gutter - RIGHT)
  const columns = Math.round(plotWidth * (devicePixelRatio || 1))
  const version = retry + live.readings
  const others = useMemo(() => channelsBeside(site, rcd), [site, rcd])
  const ask = { site: site.id, view, columns, version }
  const main = useTraces({ ...ask, channels: useMemo(() => (channel === null ? NONE : [channel]), [channel]) })
  const beside = useTraces({ ...ask, channels: others })
  const records = useRecords(site.id, rcd.ref, whole.to, retry + live.records)
  const leakage = (channel !== null && main.traces.get(channel)) || null

  const span = beside.view ?? view
  const lanes = useMemo(
    () =>
      lanesOf({
        rcd,
        channels: site.channels,
        running: beside.traces,
        changes: records.value?.changes ?? new Map(),
        open: records.value?.open ?? [],
        span,
        nameOf,
      }),
    [rcd, site, beside.traces, records.value, span, nameOf],
  )
  const { onLanes, onLastReading } = props
  useEffect(() => onLanes(lanes), [lanes, onLanes])
  const wholeShown = main.view !== null && main.view.to >= whole.to
  useEffect(() => {
    if (leakage !== null && wholeShown) onLastReading(leakage.t[leakage.t.length - 1] ?? null)
  }, [leakage, wholeShown, onLastReading])

  const trips = useMemo(() => marksOf(findings.trips), [findings.trips])
  const { tripMa, advisedShare, standingMa } = findings.headroom
  const marks = useMemo<Marks>(() => {
    const advised = advisedShare * rcd.ratedMa
    return {
      trip: { ...tripMa, text: tripText(tripMa) },
      advised: { value: advised, text: say.advised(milliamps(advised)), under: (standingMa?.p50 ?? 0) > advised },
      nights: nightsOf(site, whole),
      gaps: leakage === null ? [] : gapsOf(leakage),
      trips,
    }
  }, [site, rcd, whole.from, whole.to, leakage, trips, tripMa, standingMa, advisedShare, say])
  const hand = useGestures({ view, whole, onView: setView, onCursor: setCursor })
  const shown = channel === null ? null : leakage
  const empty =
    shown !== null && shown.t.length === 0 && main.view !== null && view.from <= whole.from && view.to >= whole.to

  return (
    <section class="strip" aria-labelledby="strip-heading" ref={section}>
      <div class="strip-head">
        <h2 id="strip-heading">{say.heading}</h2>
        <StripControls view={view} whole={whole} clock={clock} live={live} onView={setView} />
      </div>
      {channel === null && <p class="state">{say.noChannel}</p>}
      {empty && <p class="state">{say.empty}</p>}
      {main.error !== null && <Trouble error={main.error} what={say.failed} kept={leakage !== null} again={again} />}
      <Readout
        cursor={cursor}
        clock={clock}
        leakage={leakage}
        rain={traceOf(site, beside.traces, 'rain')}
        temperature={traceOf(site, beside.traces, 'temperature')}
        lanes={lanes}
      />
      <div class={`strip-body ${wide ? 'wide' : 'narrow'}`} ref={holder} aria-busy={main.busy}>
        <span class="axis-name aside" aria-hidden="true">
          {wide ? say.leakage : say.milliamps}
        </span>
        <div class="strip-flags" style={{ marginLeft: `${gutter}px` }}>
          <FlagRow
            marks={trips}
            view={view}
            width={plotWidth}
            clock={clock}
            onShow={(mark) => setView(aroundOf(mark))}
          />
        </div>
        <div class="strip-time">
          {channel !== null && (
            <TracePlot
              trace={leakage}
              view={view}
              top={topOfScale(leakage, tripMa.high)}
              width={width}
              height={wide ? 300 : 240}
              gutter={gutter}
              right={RIGHT}
              clock={clock}
              palette={palette}
              marks={marks}
            />
          )}
          {leakage === null && main.busy && channel !== null && <Loading text={say.loading} />}
          <LaneList
            lanes={lanes}
            site={site}
            traces={beside.traces}
            view={view}
            width={plotWidth}
            gutter={gutter}
            right={RIGHT}
            palette={palette}
          />
          <div
            class="strip-hand"
            ref={hand.ref}
            role="application"
            aria-label={say.describe}
            aria-describedby="strip-keys strip-summary"
            // biome-ignore lint/a11y/noNoninteractiveTabindex: the keys of this application zoom and read
            tabIndex={0}
            style={{ left: `${gutter}px`, right: `${RIGHT}px` }}
          >
            {hand.marked && (
              <span
                class="strip-marked"
                style={{ left: `${hand.marked.from}px`, width: `${hand.marked.to - hand.marked.from}px` }}
              />
            )}
            {cursor !== null && cursor >= view.from && cursor <= view.to && (
              <span class="strip-cursor" style={{ left: `${xOf(cursor, view, plotWidth)}px` }} />
            )}
          </div>
        </div>
      </div>
      <p class="aside legend">
        <span class="key key-on" aria-hidden="true" /> {say.legendOn} <span class="key key-off" aria-hidden="true" />{' '}
        {say.legendOff} <span class="key key-unknown" aria-hidden="true" /> {say.legendUnknown}
        {records.value?.cut && <> · {say.cut}</>}
      </p>
      <p class="aside" id="strip-keys">
        <span class="by-hand">{say.keys}</span>
        <span class="by-thumb">{say.touch}</span>
      </p>
      <p class="unseen" id="strip-summary">
        {summaryOf(findings, clock)}
      </p>
    </section>
  )
}

/** What stands left of the plot: the names of its lanes. */
function labelsOf(rcd: Rcd, nameOf: (of: string) => string): string[] {
  return rcd.circuits.flatMap((one) => [
    nameOf(`circuit:${one.ref}`),
    ...one.loads.map((load) => nameOf(`load:${load.ref}`)),
  ])
}

/** Running channels of the device's circuits and loads, and the site's weather. */
function channelsBeside(site: SiteOut, rcd: Rcd): string[] {
  const circuits = new Set(rcd.circuits.map((one) => one.ref))
  const loads = new Set(rcd.circuits.flatMap((one) => one.loads.map((load) => load.ref)))
  return site.channels
    .filter((one) => {
      if (one.quantity === 'rain' || one.quantity === 'temperature') return true
      if (one.quantity !== 'running') return false
      return (one.circuit !== undefined && circuits.has(one.circuit)) || (one.load !== undefined && loads.has(one.load))
    })
    .map((one) => one.ref)
}

function traceOf(site: SiteOut, traces: ReadonlyMap<string, Trace>, quantity: 'rain' | 'temperature'): Trace | null {
  const channel = site.channels.find((one) => one.quantity === quantity)
  return (channel !== undefined && traces.get(channel.ref)) || null
}

function nightsOf(site: SiteOut, whole: View): View[] {
  if (site.latitude === undefined || site.longitude === undefined) return []
  const flat = nightSpans(whole.from, whole.to, site.latitude, site.longitude)
  const nights: View[] = []
  for (let i = 0; i + 1 < flat.length; i += 2) nights.push({ from: flat[i]!, to: flat[i + 1]! })
  return nights
}

/** Without a test or levels at trips there is no one current to name. */
function tripText({ value, low, high, basis }: Findings['headroom']['tripMa']): string {
  return basis === 'limits' ? words.strip.tripBand(milliampRange(low, high)) : words.strip.tripLine(milliamps(value))
}

/** Half an hour on both sides of a trip. */
function aroundOf(mark: View): View {
  return { from: mark.from - 30 * 60_000, to: mark.to + 30 * 60_000 }
}

function summaryOf(findings: Findings, clock: SiteClock): string {
  const standing = findings.headroom.standingMa
  if (standing === null) return words.strip.empty
  return words.strip.summary({
    span: clock.span(Date.parse(findings.from), Date.parse(findings.to)),
    least: milliamps(standing.p5),
    median: milliamps(standing.p50),
    most: milliamps(standing.max),
    trips: findings.trips.length,
    gaps: findings.coverage.gaps.length,
  })
}
