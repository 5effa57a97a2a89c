import type { JSX } from 'preact'
import type { Pattern, Patterns as PatternsFound } from '../../core/contract/findings.ts'
import { words } from '../words.ts'

const ORDER = ['clock', 'period', 'sun', 'rain', 'temperature', 'load'] as const

/** What the tests for a preference say, as sentences. */
export function Patterns({ patterns }: { patterns: PatternsFound }): JSX.Element | null {
  const said = ORDER.map((kind) => [kind, patterns[kind]] as const).filter(([, pattern]) => Boolean(pattern?.verdict))
  if (said.length === 0 && patterns.timedSteps.length === 0) return null
  return (
    <section class="patterns" aria-labelledby="patterns-heading">
      <h2 id="patterns-heading">{words.patterns.heading}</h2>
      <dl class="said">
        {said.map(([kind, pattern]) => (
          <div key={kind}>
            <dt>{words.patterns[kind]}</dt>
            <dd>
              {pattern.verdict} {pText(pattern)}
            </dd>
          </div>
        ))}
        {patterns.timedSteps.length > 0 && (
          <div>
            <dt>{words.patterns.timedSteps}</dt>
            {patterns.timedSteps.map((step) => (
              <dd key={step.text}>{step.text}</dd>
            ))}
          </div>
        )}
      </dl>
    </section>
  )
}

function pText(pattern: Pattern): JSX.Element | null {
  const { p, method } = pattern
  if (p === null || p === undefined) return null
  return (
    <span class="aside p-value" title={method}>
      {words.patterns.p(p < 0.001 ? '< 0.001' : p.toPrecision(2))}
    </span>
  )
}
