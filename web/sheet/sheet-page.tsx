import type { JSX } from 'preact'
import { useEffect } from 'preact/hooks'
import type { SiteOut } from '../../core/contract/site-sheet.ts'
import { call } from '../api/call.ts'
import { apiPath } from '../api/paths.ts'
import { useFetched } from '../api/use-fetched.ts'
import { Loading } from '../frame/loading.tsx'
import { Trouble } from '../frame/trouble.tsx'
import { words } from '../words.ts'
import { Sheet } from './sheet.tsx'
import { useVersion } from './use-version.ts'

interface SheetPageProps {
  readonly site: string
  readonly rcd: string | null
  readonly from: number | null
  readonly to: number | null
}

/** Fetches the site sheet and shows the device that the address names, else the first. */
export function SheetPage(props: SheetPageProps): JSX.Element {
  const [version, again] = useVersion()
  const site = useFetched(props.site, version, (signal) => call<SiteOut>(apiPath(['sites', props.site]), { signal }))
  const name = site.value?.name
  useEffect(() => {
    document.title = name === undefined ? words.title : `${name} – ${words.title}`
    return () => {
      document.title = words.title
    }
  }, [name])
  if (site.value === null) {
    return site.error === null ? <Loading text={words.answer.working} /> : <Trouble error={site.error} again={again} />
  }
  const rcd = site.value.rcds.find((one) => one.ref === props.rcd) ?? site.value.rcds[0]
  if (rcd === undefined) {
    return (
      <>
        <h1>{site.value.name}</h1>
        <p class="state">{words.whose.noRcd}</p>
      </>
    )
  }
  return <Sheet key={rcd.ref} site={site.value} rcd={rcd} from={props.from} to={props.to} onSheetChange={again} />
}
