import type { JSX } from 'preact'
import { CallError } from '../api/call.ts'
import { words } from '../words.ts'

interface TroubleProps {
  readonly error: unknown
  readonly what?: string
  /** What is still there, said when something is. */
  readonly kept?: boolean
  readonly again?: () => void
}

/** Why something is not here, what was kept, and a way to ask again. */
export function Trouble({ error, what, kept, again }: TroubleProps): JSX.Element {
  const why = error instanceof CallError && error.status === 404 && !what ? words.trouble.noSite : messageOf(error)
  return (
    <div class="state trouble" role="alert">
      <p>
        <strong>{what ?? words.trouble.page}</strong> {why} {kept && words.trouble.kept}
      </p>
      {again && (
        <button type="button" onClick={again}>
          {words.trouble.again}
        </button>
      )}
    </div>
  )
}

function messageOf(error: unknown): string {
  return error instanceof Error ? error.message : String(error)
}
