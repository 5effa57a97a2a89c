import type { JSX } from 'preact'
import type { NextStep, Proof } from '../../core/contract/findings.ts'
import { percent } from '../format/numbers.ts'
import { words } from '../words.ts'

interface NextStepsProps {
  readonly next: readonly NextStep[]
  readonly proof: Proof
}

/** What to isolate or test next, what it would settle, and whether a remedy has proved itself. */
export function NextSteps({ next, proof }: NextStepsProps): JSX.Element {
  const say = words.next
  return (
    <section class="next" aria-labelledby="next-heading">
      <h2 id="next-heading">{say.heading}</h2>
      {next.length === 0 ? (
        <p class="state">{say.none}</p>
      ) : (
        <ol class="steps">
          {next.map((step) => (
            <li key={step.text}>
              {step.text}
              {step.settles > 0 && step.days > 0 && (
                <span class="aside"> {say.settles(percent(step.settles), say.days(step.days))}</span>
              )}
            </li>
          ))}
        </ol>
      )}
      {proof.text !== '' && (
        <>
          <h3>{say.proof}</h3>
          <p>
            {proof.text} {proof.confidenceFixed !== null && say.confidence(percent(proof.confidenceFixed))}
          </p>
        </>
      )}
    </section>
  )
}
