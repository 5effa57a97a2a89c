import type { ComponentChildren, JSX } from 'preact'
import type { Whoami } from '../../core/contract/keys.ts'
import { signOut } from '../api/session.ts'
import { Link } from '../route/link.tsx'
import { words } from '../words.ts'
import { useOnline } from './use-online.ts'

interface FrameProps {
  readonly who: Whoami | null
  readonly onOut?: () => void
  readonly children: ComponentChildren
}

/** What stands round every page: the way home, who is signed in, and a word when the network is away. */
export function Frame({ who, onOut, children }: FrameProps): JSX.Element {
  const online = useOnline()
  const leave = (): void => {
    signOut().then(onOut, onOut)
  }
  return (
    <>
      <a class="skip" href="#main">
        {words.skip}
      </a>
      <header class="top">
        <Link to="/" class="brand">
          {words.title}
        </Link>
        {who && (
          <div class="who">
            <span>{words.sign.as(who.label || who.role)}</span>
            <button type="button" class="quiet" onClick={leave}>
              {words.sign.out}
            </button>
          </div>
        )}
      </header>
      {!online && (
        <p class="offline" role="status">
          {words.trouble.offline}
        </p>
      )}
      <main id="main" tabIndex={-1}>
        {children}
      </main>
    </>
  )
}
