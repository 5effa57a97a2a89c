import type { JSX } from 'preact'
import type { Trace } from '../../core/contract/readings.ts'
import { fixed, milliamps } from '../format/numbers.ts'
import type { SiteClock } from '../format/site-clock.ts'
import { words } from '../words.ts'
import type { Lane } from './lanes.ts'
import { type State, stateAt } from './state-spans.ts'
import { valueAt } from './value-at.ts'

interface ReadoutProps {
  readonly cursor: number | null
  readonly clock: SiteClock
  readonly leakage: Trace | null
  readonly rain: Trace | null
  readonly temperature: Trace | null
  readonly lanes: readonly Lane[]
}

/** Everything at the cursor's moment, in words. */
export function Readout({ cursor, clock, leakage, rain, temperature, lanes }: ReadoutProps): JSX.Element {
  const say = words.strip
  if (cursor === null)
    return (
      <p class="readout" aria-live="polite">
        {say.cursorNone}
      </p>
    )
  const level = leakage === null ? null : valueAt(leakage, cursor)
  const wet = rain === null ? null : valueAt(rain, cursor)
  const warm = temperature === null ? null : valueAt(temperature, cursor)
  const named = (state: State): string =>
    lanes
      .filter((lane) => (lane.kind === 'load' || state === 'off') && stateAt(lane.spans, cursor) === state)
      .map((lane) => lane.label)
      .join(', ')
  const groups = (['on', 'off', 'unknown'] as const).map((state) => [say.stateList[state], named(state)] as const)
  return (
    <p class="readout" aria-live="polite">
      <strong>{clock.exactMoment(cursor)}</strong>{' '}
      <span class="readout-level">{level === null ? say.noReading : say.reading(milliamps(level))}</span>
      {wet !== null && <>, {say.rain(wet)}</>}
      {warm !== null && <>, {fixed(warm, 1)} °C</>}
      {groups.map(
        ([name, list]) =>
          list !== '' && (
            <span key={name}>
              . {name}: {list}
            </span>
          ),
      )}
      .
    </p>
  )
}
