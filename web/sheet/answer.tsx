import type { JSX } from 'preact'
import type { Findings, Grade } from '../../core/contract/findings.ts'
import { hours } from '../format/duration.ts'
import { Loading } from '../frame/loading.tsx'
import { Trouble } from '../frame/trouble.tsx'
import { words } from '../words.ts'

interface AnswerProps {
  readonly findings: Findings | null
  readonly busy: boolean
  readonly error: unknown
  readonly again: () => void
}

/** The answer in words, how sure it is, and the cautions. The last answer stays while a new one is worked out. */
export function Answer({ findings, busy, error, again }: AnswerProps): JSX.Element {
  const say = words.answer
  return (
    <section class="answer" aria-labelledby="answer-heading" aria-busy={busy}>
      <div class="answer-head">
        <h2 id="answer-heading">{say.heading}</h2>
        <p class="again" role="status">
          {findings !== null && busy ? say.again : ''}
        </p>
      </div>
      {findings === null && busy && <Loading text={say.working} />}
      {findings !== null && (
        <>
          <p class="answer-text" data-testid="answer">
            {findings.answer.text}
          </p>
          <p class="sureness">
            <Mark grade={findings.answer.sureness} />{' '}
            {findings.answer.sureness === null ? say.nothing : say.sure[findings.answer.sureness]}.{' '}
            {say.basis(findings.coverage.trips, hours(findings.coverage.energisedHours))}
          </p>
        </>
      )}
      {error !== null && <Trouble error={error} what={say.failed} kept={findings !== null} again={again} />}
      <p class="caution">{say.caution}</p>
      {findings !== null && (
        <nav class="jump" aria-label={say.jump}>
          <a href="#next-heading">{words.next.heading}</a>
          <a href="#line-up-heading">{words.lineUp.heading}</a>
          <a href="#headroom-heading">{words.headroom.heading}</a>
          <a href="#trips-heading">{words.trips.heading}</a>
        </nav>
      )}
    </section>
  )
}

const FILLED: Readonly<Record<Grade, number>> = { strong: 3, fair: 2, slight: 1, cleared: 0, unjudged: 0 }

/** How sure, as zero to three filled drops; the words beside it say the same. */
function Mark({ grade }: { grade: Grade | null }): JSX.Element {
  const filled = grade === null ? 0 : FILLED[grade]
  return (
    <span class="mark" aria-hidden="true">
      {'●'.repeat(filled)}
      {'○'.repeat(3 - filled)}
    </span>
  )
}
