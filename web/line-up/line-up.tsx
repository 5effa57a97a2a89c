import type { JSX } from 'preact'
import type { Suspect } from '../../core/contract/findings.ts'
import { words } from '../words.ts'
import { SuspectCard } from './suspect-card.tsx'

interface LineUpProps {
  readonly suspects: readonly Suspect[]
  readonly nameOf: (of: string) => string
}

/** Below this probability a suspect is listed, but folded away. */
const WEAK = 0.1

/** Suspects by probability; the cleared and the not judged stay on the sheet, folded. */
export function LineUp({ suspects, nameOf }: LineUpProps): JSX.Element {
  const say = words.lineUp
  const cleared = suspects.filter((one) => one.grade === 'cleared')
  const unjudged = suspects.filter((one) => one.grade === 'unjudged')
  const judged = suspects.filter((one) => one.grade !== 'cleared' && one.grade !== 'unjudged')
  const strong = judged.filter((one, i) => one.probability >= WEAK || i === 0)
  const weak = judged.filter((one) => !strong.includes(one))
  const list = (some: readonly Suspect[]): JSX.Element => (
    <ol class="suspects">
      {some.map((suspect) => (
        <SuspectCard key={suspect.of} suspect={suspect} nameOf={nameOf} />
      ))}
    </ol>
  )
  const folded = (title: string, some: readonly Suspect[]): JSX.Element | null =>
    some.length === 0 ? null : (
      <details class="fold">
        <summary>{title}</summary>
        {list(some)}
      </details>
    )
  return (
    <section class="line-up" aria-labelledby="line-up-heading">
      <h2 id="line-up-heading">{say.heading}</h2>
      {judged.length === 0 && cleared.length === 0 ? <p class="state">{say.none}</p> : <p class="aside">{say.intro}</p>}
      {strong.length > 0 && list(strong)}
      {folded(say.weak(weak.length), weak)}
      {folded(say.cleared(cleared.length), cleared)}
      {folded(say.unjudged(unjudged.length), unjudged)}
    </section>
  )
}
