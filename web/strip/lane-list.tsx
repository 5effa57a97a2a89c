import type { JSX } from 'preact'
import type { Trace } from '../../core/contract/readings.ts'
import type { SiteOut } from '../../core/contract/site-sheet.ts'
import { words } from '../words.ts'
import { LaneRow } from './lane-row.tsx'
import type { Lane } from './lanes.ts'
import type { Palette } from './palette.ts'
import type { View } from './view.ts'
import { WeatherLane } from './weather-lane.tsx'

interface LaneListProps {
  readonly lanes: readonly Lane[]
  readonly site: SiteOut
  readonly traces: ReadonlyMap<string, Trace>
  readonly view: View
  readonly width: number
  readonly gutter: number
  readonly right: number
  readonly palette: Palette
}

/** All lanes under the trace: weather first, then circuits with their loads. */
export function LaneList(props: LaneListProps): JSX.Element {
  const { lanes, site, traces, view, width, palette } = props
  const weather = site.channels.flatMap((channel) => {
    const trace = traces.get(channel.ref)
    if (trace === undefined || (channel.quantity !== 'rain' && channel.quantity !== 'temperature')) return []
    const values = trace.v.filter((value) => value !== null)
    if (values.length === 0) return []
    const name = channel.label || (channel.quantity === 'rain' ? words.strip.rainLane : words.strip.temperatureLane)
    const range =
      channel.quantity === 'rain'
        ? words.strip.rainMost(Math.max(...values))
        : words.strip.temperatureRange(Math.min(...values), Math.max(...values))
    const shared = { name, range, trace, view, width, palette }
    return [<WeatherLane key={channel.ref} kind={channel.quantity} {...shared} />]
  })
  return (
    <ul
      class="lanes"
      aria-label={words.strip.lanes}
      style={{ '--gutter': `${props.gutter}px`, '--right': `${props.right}px` }}
    >
      {weather}
      {lanes.map((lane) => (
        <LaneRow key={lane.of} lane={lane} view={view} width={width} palette={palette} />
      ))}
    </ul>
  )
}
