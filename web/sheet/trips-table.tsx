import type { JSX } from 'preact'
import type { TripFinding } from '../../core/contract/findings.ts'
import { milliamps } from '../format/numbers.ts'
import type { SiteClock } from '../format/site-clock.ts'
import { markOf } from '../strip/trip-marks.ts'
import type { View } from '../strip/view.ts'
import { words } from '../words.ts'

interface TripsTableProps {
  readonly trips: readonly TripFinding[]
  readonly clock: SiteClock
  readonly nameOf: (of: string) => string
  readonly onShow: (view: View) => void
}

/** Half an hour on both sides of a trip shows its course. */
const AROUND = 30 * 60_000

/** Every trip with its course, the level before, what changed; a button shows it on the strip. */
export function TripsTable({ trips, clock, nameOf, onShow }: TripsTableProps): JSX.Element {
  const say = words.trips
  const show = (trip: TripFinding): void => {
    const mark = markOf(trip, 0)
    if (mark !== null) onShow({ from: mark.from - AROUND, to: mark.to + AROUND })
  }
  return (
    <section class="trips" aria-labelledby="trips-heading">
      <h2 id="trips-heading">{say.heading}</h2>
      {trips.length === 0 ? (
        <p class="state">{say.none}</p>
      ) : (
        <table class="stacking">
          <thead>
            <tr>
              <th scope="col">{say.number}</th>
              <th scope="col">{say.when}</th>
              <th scope="col">{say.course}</th>
              <th scope="col">{say.level}</th>
              <th scope="col">{say.trigger}</th>
            </tr>
          </thead>
          <tbody>
            {trips.map((trip, i) => (
              <tr key={trip.id ?? `${trip.at}-${i}`}>
                <th scope="row">
                  <button type="button" class="flag-button" aria-label={say.show(i + 1)} onClick={() => show(trip)}>
                    {i + 1}
                  </button>
                </th>
                <td>
                  {whenOf(trip, clock)}
                  {trip.id === null && <span class="aside"> {say.proposed}</span>}
                </td>
                <td>{say.courses[trip.course]}</td>
                <td>
                  {trip.levelMa === null ? '–' : milliamps(trip.levelMa)}
                  {trip.usualMa !== null && (
                    <span class="aside">
                      {' '}
                      {say.usual} {milliamps(trip.usualMa)}
                    </span>
                  )}
                </td>
                <td>
                  {trip.trigger === null ? (
                    <span class="aside">{say.noTrigger}</span>
                  ) : (
                    <strong>{nameOf(trip.trigger)}</strong>
                  )}
                  {trip.text !== '' && <span class="trip-text">{trip.text}</span>}
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      )}
    </section>
  )
}

function whenOf(trip: TripFinding, clock: SiteClock): string {
  if (trip.at !== null) return clock.exactMoment(Date.parse(trip.at))
  if (trip.after !== null && trip.before !== null) {
    return `${words.trips.between} ${clock.span(Date.parse(trip.after), Date.parse(trip.before))}`
  }
  return '–'
}
