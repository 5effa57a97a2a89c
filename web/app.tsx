import type { JSX } from 'preact'
import { useEffect, useState } from 'preact/hooks'
import type { Whoami } from '../core/contract/keys.ts'
import { CallError } from './api/call.ts'
import { signIn, takeKeyFromAddress, whoAmI } from './api/session.ts'
import { Frame } from './frame/frame.tsx'
import { Loading } from './frame/loading.tsx'
import { Trouble } from './frame/trouble.tsx'
import { ReportPage } from './report/report-page.tsx'
import { useRoute } from './route/use-route.ts'
import { SheetPage } from './sheet/sheet-page.tsx'
import { SignIn } from './sign-in/sign-in.tsx'
import { SitesPage } from './sites/sites-page.tsx'
import { words } from './words.ts'

type Session =
  | { readonly state: 'asking' }
  | { readonly state: 'nobody'; readonly refused: boolean }
  | { readonly state: 'failed'; readonly error: unknown }
  | { readonly state: 'signed-in'; readonly who: Whoami }

/** Who is here, then the page that the address and the key allow. */
export function App(): JSX.Element {
  const [session, setSession] = useState<Session>({ state: 'asking' })
  const ask = (): void => {
    setSession({ state: 'asking' })
    enter().then(setSession, (error: unknown) => setSession({ state: 'failed', error }))
  }
  useEffect(ask, [])
  switch (session.state) {
    case 'asking':
      return (
        <Frame who={null}>
          <Loading text="" />
        </Frame>
      )
    case 'failed':
      return (
        <Frame who={null}>
          <Trouble error={session.error} again={ask} />
        </Frame>
      )
    case 'nobody':
      return <SignIn refused={session.refused} onWho={(who) => setSession({ state: 'signed-in', who })} />
    case 'signed-in':
      return <Allowed who={session.who} onOut={() => setSession({ state: 'nobody', refused: false })} />
  }
}

function Allowed({ who, onOut }: { who: Whoami; onOut: () => void }): JSX.Element {
  const route = useRoute()
  if (who.role === 'occupant') {
    return <ReportPage who={who} rcd={route.page === 'report' ? route.rcd : null} />
  }
  if (who.role === 'logger') {
    return (
      <Frame who={who} onOut={onOut}>
        <h1>{words.title}</h1>
        <p class="state">{words.trouble.loggerKey}</p>
      </Frame>
    )
  }
  if (route.page === 'sheet') {
    return (
      <Frame who={who} onOut={onOut}>
        <SheetPage key={route.site} {...route} />
      </Frame>
    )
  }
  if (route.page === 'sites') {
    return (
      <Frame who={who} onOut={onOut}>
        <SitesPage who={who} />
      </Frame>
    )
  }
  return (
    <Frame who={who} onOut={onOut}>
      <h1>{words.title}</h1>
      <p class="state">{words.trouble.nowhere}</p>
    </Frame>
  )
}

/** A key in the address signs in; otherwise the cookie of an earlier visit may still hold. */
async function enter(): Promise<Session> {
  const key = takeKeyFromAddress()
  if (key !== null) {
    try {
      return { state: 'signed-in', who: await signIn(key) }
    } catch (error) {
      if (error instanceof CallError && (error.status === 401 || error.status === 403)) {
        return { state: 'nobody', refused: true }
      }
      throw error
    }
  }
  const who = await whoAmI()
  return who === null ? { state: 'nobody', refused: false } : { state: 'signed-in', who }
}
