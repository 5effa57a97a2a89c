import type { JSX } from 'preact'
import { useEffect, useState } from 'preact/hooks'
import type { Whoami } from '../../core/contract/keys.ts'
import type { SiteSummary } from '../../core/contract/site-sheet.ts'
import { call } from '../api/call.ts'
import type { ListPage } from '../api/every-page.ts'
import { apiPath } from '../api/paths.ts'
import { useFetched } from '../api/use-fetched.ts'
import { siteClock } from '../format/site-clock.ts'
import { Loading } from '../frame/loading.tsx'
import { Trouble } from '../frame/trouble.tsx'
import { Link } from '../route/link.tsx'
import { sheetAddress } from '../route/route.ts'
import { go } from '../route/use-route.ts'
import { words } from '../words.ts'

/** Most sites on one page of the list; the search finds the others. */
const PAGE = 200

/** All sites with a search; a single one is opened at once, and so is the site of a viewer key. */
export function SitesPage({ who }: { who: Whoami }): JSX.Element {
  const [search, setSearch] = useState('')
  const [asked, setAsked] = useState('')
  const [version, setVersion] = useState(0)
  useEffect(() => {
    const timer = setTimeout(() => setAsked(search.trim()), 200)
    return () => clearTimeout(timer)
  }, [search])
  const only = who.site
  const path = apiPath(['sites'], { limit: PAGE, search: asked === '' ? null : asked })
  const list = useFetched(
    only === null ? path : null,
    version,
    (signal) => call<ListPage<SiteSummary>>(path, { signal }),
    true,
  )
  const sites = list.value?.items ?? []
  const single = only ?? (asked === '' && sites.length === 1 ? sites[0]!.id : null)
  useEffect(() => {
    if (single !== null) go(sheetAddress(single), true)
  }, [single])
  if (single !== null || (list.value === null && list.busy)) return <Loading text={words.sites.loading} />
  const shown = sites.filter((site) => site.name.toLowerCase().includes(search.trim().toLowerCase()))
  return (
    <div class="sites">
      <h1>{words.sites.heading}</h1>
      {list.error !== null && (
        <Trouble error={list.error} kept={sites.length > 0} again={() => setVersion((n) => n + 1)} />
      )}
      {(sites.length > 0 || asked !== '') && (
        <p class="search">
          <label for="search">{words.sites.search}</label>
          <input id="search" type="search" value={search} onInput={(event) => setSearch(event.currentTarget.value)} />
        </p>
      )}
      <ul class="site-list">
        {shown.map((site) => (
          <li key={site.id}>
            <Link to={sheetAddress(site.id)}>{site.name}</Link>
            <span class="aside">
              {words.sites.devices(site.rcds)},{' '}
              {site.lastReadingAt === null
                ? words.sites.never
                : words.sites.last(whenOf(site.lastReadingAt, site.timeZone))}
              {(site.openMatters ?? 0) > 0 && (
                <>
                  , <strong>{words.sites.open(site.openMatters ?? 0)}</strong>
                </>
              )}
            </span>
          </li>
        ))}
      </ul>
      {list.value !== null && shown.length === 0 && (
        <p class="state">{search.trim() === '' ? words.sites.none : words.sites.noMatch(search.trim())}</p>
      )}
      {sites.length > 0 && (
        <p class="hint">
          {words.sites.fresh} <code>/api/sites</code> (<a href="/api">{words.sites.description}</a>).
        </p>
      )}
    </div>
  )
}

function whenOf(at: string, zone: string): string {
  return siteClock(zone).moment(Date.parse(at))
}
