import type { JSX } from 'preact'
import { milliampRange, milliamps } from '../format/numbers.ts'
import { words } from '../words.ts'
import type { Budget, Part } from './parts.ts'

interface PartListProps {
  readonly budget: Budget
  readonly out: ReadonlySet<string>
  readonly nameOf: (of: string) => string
  readonly onToggle: (of: string) => void
}

/** The parts as switches: a ticked one is in, an empty one is taken out. */
export function PartList({ budget, out, nameOf, onToggle }: PartListProps): JSX.Element {
  const say = words.headroom
  return (
    <fieldset class="parts">
      <legend>{say.toggle}</legend>
      <ul>
        {budget.parts.map((part, i) => (
          <li key={part.of}>
            <label>
              <input type="checkbox" checked={!out.has(part.of)} onChange={() => onToggle(part.of)} />
              <span class={`part-number ${part.usuallyOn ? 'usual' : 'extra'}`}>{i + 1}</span>
              <span class="part-name">{nameOf(part.of)}</span>
              <span class="part-ma">{milliamps(part.ma)}</span>
              <span class="aside">
                {intervalOf(part)}, {part.usuallyOn ? say.on : say.off}
              </span>
            </label>
          </li>
        ))}
        {budget.rest > 0 && (
          <li class="part-rest">
            <span class="part-name">{say.rest}</span>
            <span class="part-ma">{milliamps(budget.rest)}</span>
          </li>
        )}
      </ul>
    </fieldset>
  )
}

/** The interval of a part in words. */
export function intervalOf(part: Part): string {
  return part.low === null || part.high === null ? words.headroom.noInterval : milliampRange(part.low, part.high)
}
