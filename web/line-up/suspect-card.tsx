import type { JSX } from 'preact'
import type { Reason, Suspect } from '../../core/contract/findings.ts'
import { odds, percent } from '../format/numbers.ts'
import { words } from '../words.ts'
import { figureWords } from './figure-words.ts'

interface SuspectCardProps {
  readonly suspect: Suspect
  readonly nameOf: (of: string) => string
}

/** One suspect: how likely, in which role, why, and what would settle it. */
export function SuspectCard({ suspect, nameOf }: SuspectCardProps): JSX.Element {
  const say = words.lineUp
  const judged = suspect.grade !== 'unjudged'
  const nothing = suspect.of === 'none'
  const facts = [
    judged ? say.grade[suspect.grade] : null,
    nothing || !judged ? null : say.role[suspect.role],
    suspect.localTime === undefined ? null : say.localTime(suspect.localTime),
    suspect.hours === undefined ? null : say.every(suspect.hours),
    judged && suspect.share >= 0.01 ? say.share(percent(suspect.share)) : null,
  ].filter((fact) => fact !== null)
  return (
    <li class={`suspect grade-${suspect.grade}`}>
      <h3>{suspect.label || nameOf(suspect.of)}</h3>
      {judged && (
        <p class="odds">
          <span class="odds-bar" aria-hidden="true">
            <span style={{ width: `${Math.round(suspect.probability * 100)}%` }} />
          </span>
          <span class="odds-figure">{odds(suspect.probability)}</span>
        </p>
      )}
      <p class="facts">{facts.join(' · ')}</p>
      {suspect.because.length > 0 && (
        <ul class="because">
          {suspect.because.map((reason) => (
            <li key={reason.text}>{reason.text}</li>
          ))}
        </ul>
      )}
      {suspect.sameAs !== undefined && suspect.sameAs.length > 0 && (
        <p class="same">{say.same(suspect.sameAs.map(nameOf).join(', '))}</p>
      )}
      {suspect.next !== '' && (
        <p class="settle">
          <strong>{say.next}:</strong> {suspect.next}
        </p>
      )}
      {suspect.because.length > 0 && (
        <details class="figures">
          <summary>{say.figures}</summary>
          {suspect.because.map((reason) => (
            <Behind key={reason.text} reason={reason} />
          ))}
        </details>
      )}
    </li>
  )
}

/** What a reason rests on: its method and its figures. */
function Behind({ reason }: { reason: Reason }): JSX.Element {
  const figures = Object.entries(reason.figures).map(([name, value]) => figureWords(name, value))
  return (
    <>
      <p class="method">
        {words.lineUp.method}: {reason.method}
      </p>
      {figures.length > 0 && (
        <dl>
          {figures.map(({ name, value }) => (
            <div key={name}>
              <dt>{name}</dt>
              <dd>{value}</dd>
            </div>
          ))}
        </dl>
      )}
    </>
  )
}
