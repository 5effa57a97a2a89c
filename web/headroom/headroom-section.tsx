import type { JSX } from 'preact'
import { useMemo, useState } from 'preact/hooks'
import type { BudgetLine, Headroom } from '../../core/contract/findings.ts'
import { milliampRange, milliamps, percent } from '../format/numbers.ts'
import { words } from '../words.ts'
import { BudgetTable } from './budget-table.tsx'
import { HeadroomBar } from './headroom-bar.tsx'
import { PartList } from './part-list.tsx'
import { budgetOf, remaining } from './parts.ts'

interface HeadroomSectionProps {
  readonly headroom: Headroom
  readonly budget: readonly BudgetLine[]
  readonly ratedMa: number
  readonly nameOf: (of: string) => string
  /** How much of the known time a subject is on; null where nothing says. */
  readonly shareOn: (of: string) => number | null
}

/** Who holds how much of the trip current, and what remains when parts are taken out by hand. */
export function HeadroomSection({ headroom, budget: lines, nameOf, shareOn }: HeadroomSectionProps): JSX.Element {
  const say = words.headroom
  const [out, setOut] = useState<ReadonlySet<string>>(new Set())
  const budget = useMemo(() => budgetOf(headroom, lines, shareOn), [headroom, lines, shareOn])
  const toggle = (of: string): void => {
    const next = new Set(out)
    if (!next.delete(of)) next.add(of)
    setOut(next)
  }
  if (budget === null) {
    return (
      <section class="headroom" aria-labelledby="headroom-heading">
        <h2 id="headroom-heading">{say.heading}</h2>
        <p class="state">{say.none}</p>
      </section>
    )
  }
  const { tripMa, shareOfRating, advisedShare } = headroom
  const left = tripMa.value - budget.standing
  const rest = remaining(budget, out)
  return (
    <section class="headroom" aria-labelledby="headroom-heading">
      <h2 id="headroom-heading">{say.heading}</h2>
      <p>
        {say.sentence({
          standing: milliamps(budget.standing),
          trip: milliamps(tripMa.value),
          range: milliampRange(tripMa.low, tripMa.high),
          basis: say.basis[tripMa.basis],
          left: left > 0 ? milliamps(left) : say.noneLeft,
        })}{' '}
        {shareOfRating !== null && say.advised(percent(shareOfRating), percent(advisedShare))}
      </p>
      <HeadroomBar budget={budget} out={out} nameOf={nameOf} onToggle={toggle} />
      {budget.parts.length > 0 && (
        <>
          <PartList budget={budget} out={out} nameOf={nameOf} onToggle={toggle} />
          <p class="remains" role="status">
            {out.size === 0
              ? say.all(milliamps(rest.ma), percent(rest.share), rest.headroom >= 0)
              : say.left(
                  milliamps(rest.ma),
                  percent(rest.share),
                  rest.headroom >= 0 ? milliamps(rest.headroom) : say.over(milliamps(-rest.headroom)),
                )}{' '}
            <span class="aside">
              {out.size === 0 ? say.sum : say.bounds(milliamps(rest.least), milliamps(rest.most))}
            </span>
          </p>
          {out.size > 0 && (
            <button type="button" class="quiet" onClick={() => setOut(new Set())}>
              {say.putBack}
            </button>
          )}
        </>
      )}
      {budget.unjudged.length > 0 && (
        <p class="aside">{say.unjudged(budget.unjudged.map((line) => nameOf(line.of)).join(', '))}</p>
      )}
      {budget.parts.length > 0 && (
        <details class="fold">
          <summary>{say.table}</summary>
          <BudgetTable budget={budget} nameOf={nameOf} />
        </details>
      )}
    </section>
  )
}
