import type { Evidence } from '../../core/timeline/evidence.ts'
import type { Series } from '../../core/timeline/series.ts'

/** Share of the readings in which a load ran, and in how many of the trips it ran by its last reading before. */
interface Ran {
  readonly of: string
  readonly share: number
  readonly trips: number
}

/** The load most often running at trips: what whoever writes a diary would blame. Null without any. */
export function mostOftenRunning(evidence: Evidence): string | null {
  return best(
    ranAtTrips(evidence).filter(({ trips }) => trips > 0),
    ({ trips }) => trips,
  )
}

/** The load with the greatest ratio of trip rates running to not running, half a trip added to each. Null without any. */
export function plainRateRatio(evidence: Evidence): string | null {
  const all = evidence.trips.filter((trip) => trip.rcd === evidence.rcd).length
  const odds = ({ share, trips }: Ran): number => (trips + 0.5) / share / ((all - trips + 0.5) / (1 - share))
  return best(
    ranAtTrips(evidence).filter(({ share }) => share > 0 && share < 1),
    odds,
  )
}

function best(ran: readonly Ran[], merit: (ran: Ran) => number): string | null {
  const [first] = [...ran].sort((a, b) => merit(b) - merit(a))
  return first?.of ?? null
}

function ranAtTrips(evidence: Evidence): Ran[] {
  const instants = evidence.trips.filter((trip) => trip.rcd === evidence.rcd).map((trip) => trip.at ?? trip.before ?? 0)
  return evidence.sheet.channels.flatMap((channel) => {
    const series = evidence.series.get(channel.ref)
    if (channel.quantity !== 'running' || channel.load === undefined || series === undefined) return []
    const on = series.v.reduce((sum, v) => sum + v, 0)
    const trips = instants.filter((at) => ranBefore(series, at)).length
    return [{ of: `load:${channel.load}`, share: on / series.v.length, trips }]
  })
}

/** Whether it ran in the five minutes before. */
function ranBefore(series: Series, at: number): boolean {
  for (let i = series.t.length - 1; i >= 0; i--) {
    const t = series.t[i]!
    if (t < at - 300_000) return false
    if (t <= at && series.v[i] === 1) return true
  }
  return false
}
