import type { JSX } from 'preact'
import type { MatterOut } from '../../core/contract/alerts.ts'
import { call } from '../api/call.ts'
import type { ListPage } from '../api/every-page.ts'
import { apiPath } from '../api/paths.ts'
import { useFetched } from '../api/use-fetched.ts'
import { words } from '../words.ts'

/** More would hide the answer; the API has them all. */
const SHOWN = 8
/** A proven remedy is good news for the end of the sheet, and lasts. */
const PRESSING: readonly string[] = ['silence', 'trip', 'level']

interface OpenMattersProps {
  readonly site: string
  /** Rises when something was noticed, or is over. */
  readonly version: number
}

/** What lasts right now and wants a look: silent loggers, a device that is open, a level near the trip current. */
export function OpenMatters({ site, version }: OpenMattersProps): JSX.Element | null {
  const path = apiPath(['sites', site, 'alerts', 'matters'], { open: 'true', limit: 100 })
  const { value } = useFetched(path, version, (signal) => call<ListPage<MatterOut>>(path, { signal }))
  const matters = (value?.items ?? []).filter(({ kind }) => PRESSING.includes(kind))
  if (matters.length === 0) return null
  const more = matters.length - SHOWN
  return (
    <section class="open-matters" aria-label={words.whose.now} data-testid="open-matters">
      <ul>
        {matters.slice(0, SHOWN).map(({ id, text }) => (
          <li key={id}>{text}</li>
        ))}
        {more > 0 && <li>{words.whose.nowMore(more)}</li>}
      </ul>
    </section>
  )
}
