import type { JSX } from 'preact'
import { milliamps, milliampsBare } from '../format/numbers.ts'
import { words } from '../words.ts'
import type { Budget } from './parts.ts'
import { remaining } from './parts.ts'

interface HeadroomBarProps {
  readonly budget: Budget
  readonly out: ReadonlySet<string>
  readonly nameOf: (of: string) => string
  readonly onToggle: (of: string) => void
}

/** The share of a phone's bar that one digit takes. */
const DIGIT = 0.028

/**
 * One bar from zero to the trip current. What is usually on is filled, what adds when on is hatched, the trip current
 * stands with its band. The list below it says the same in words, so the bar is for the eye and the pointer alone.
 */
export function HeadroomBar({ budget, out, nameOf, onToggle }: HeadroomBarProps): JSX.Element {
  const whole = remaining(budget, new Set()).ma
  const full = Math.max(budget.trip.high, whole) * 1.04
  const at = (ma: number): string => `${Math.min(100, Math.max(0, (ma / full) * 100)).toFixed(2)}%`
  const usual = budget.parts.filter((part) => part.usuallyOn)
  const extra = budget.parts.filter((part) => !part.usuallyOn)
  let sum = budget.rest
  const kept = [...usual, ...extra].filter((part) => !out.has(part.of))
  return (
    <figure class="headroom-bar" aria-hidden="true">
      <div class="bar">
        {budget.rest > 0 && (
          <span
            class="bar-part rest"
            title={`${words.headroom.rest}: ${milliamps(budget.rest)}`}
            style={{ left: 0, width: at(budget.rest) }}
          >
            {budget.rest / full > 0.07 ? milliampsBare(budget.rest) : ''}
          </span>
        )}
        {kept.map((part) => {
          const left = at(sum)
          sum += part.ma
          const number = budget.parts.indexOf(part) + 1
          return (
            // biome-ignore lint/a11y/noStaticElementInteractions: the list below holds the same switches for keyboard and reader
            // biome-ignore lint/a11y/useKeyWithClickEvents: see above
            <span
              key={part.of}
              class={`bar-part ${part.usuallyOn ? 'usual' : 'extra'}`}
              title={`${nameOf(part.of)}: ${milliamps(part.ma)}`}
              style={{ left, width: at(part.ma) }}
              onClick={() => onToggle(part.of)}
            >
              <span class="bar-number">{part.ma / full > DIGIT * String(number).length ? number : ''}</span>
            </span>
          )
        })}
        <span class="bar-band" style={{ left: at(budget.trip.low), width: at(budget.trip.high - budget.trip.low) }} />
        <span class="bar-trip" style={{ left: at(budget.trip.value) }} />
        <span class="bar-median" style={{ left: at(budget.standing) }} />
      </div>
      <div class="bar-scale">
        <span style={{ left: 0 }}>0</span>
        <span class="bar-scale-median" style={{ left: at(budget.standing) }}>
          {words.headroom.median} {milliampsBare(budget.standing)}
        </span>
        <span class="bar-scale-trip" style={{ left: at(budget.trip.value) }}>
          {words.headroom.trip} {milliamps(budget.trip.value)}
        </span>
      </div>
    </figure>
  )
}
