import type { JSX } from 'preact'
import { fixed, milliamps } from '../format/numbers.ts'
import { words } from '../words.ts'
import { intervalOf } from './part-list.tsx'
import type { Budget } from './parts.ts'

interface BudgetTableProps {
  readonly budget: Budget
  readonly nameOf: (of: string) => string
}

/** The bar as a table: the same figures, and what each rests on. */
export function BudgetTable({ budget, nameOf }: BudgetTableProps): JSX.Element {
  const say = words.headroom
  return (
    // biome-ignore lint/a11y/noNoninteractiveTabindex: a box that scrolls sideways must be reachable by keyboard
    <section class="scrolling" tabIndex={0} aria-label={say.table}>
      <table>
        <thead>
          <tr>
            <th scope="col">{say.part}</th>
            <th scope="col">{say.ma}</th>
            <th scope="col">{say.interval}</th>
            <th scope="col">{say.from}</th>
            <th scope="col">{say.switchings}</th>
          </tr>
        </thead>
        <tbody>
          {budget.parts.map((part) => (
            <tr key={part.of}>
              <th scope="row">{nameOf(part.of)}</th>
              <td class="whole">{milliamps(part.ma)}</td>
              <td class="whole">{intervalOf(part)}</td>
              <td>
                {say.source[part.basis]}
                {part.note !== null && <span class="aside"> {part.note}</span>}
              </td>
              <td>{fixed(part.switchings, 0)}</td>
            </tr>
          ))}
          <tr>
            <th scope="row">{say.rest}</th>
            <td>{milliamps(budget.rest)}</td>
            <td colSpan={3} />
          </tr>
        </tbody>
      </table>
    </section>
  )
}
