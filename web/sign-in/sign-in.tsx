import type { JSX } from 'preact'
import { useState } from 'preact/hooks'
import type { Whoami } from '../../core/contract/keys.ts'
import { CallError } from '../api/call.ts'
import { signIn } from '../api/session.ts'
import { Frame } from '../frame/frame.tsx'
import { words } from '../words.ts'

interface SignInProps {
  /** A key from the address was tried and not taken. */
  readonly refused: boolean
  readonly onWho: (who: Whoami) => void
}

/** One field for a key. */
export function SignIn({ refused, onWho }: SignInProps): JSX.Element {
  const [key, setKey] = useState('')
  const [busy, setBusy] = useState(false)
  const [trouble, setTrouble] = useState<string | null>(refused ? words.sign.wrong : null)
  const send = async (event: Event): Promise<void> => {
    event.preventDefault()
    setBusy(true)
    setTrouble(null)
    try {
      onWho(await signIn(key.trim()))
    } catch (error) {
      const known = error instanceof CallError && (error.status === 401 || error.status === 403 || error.status === 422)
      setTrouble(known ? words.sign.wrong : error instanceof Error ? error.message : String(error))
      setBusy(false)
    }
  }
  return (
    <Frame who={null}>
      <form class="card sign-in" onSubmit={send}>
        <h1>{words.sign.heading}</h1>
        <p id="key-what">{words.sign.what}</p>
        <label for="key">{words.sign.field}</label>
        <input
          id="key"
          type="password"
          autocomplete="current-password"
          autocapitalize="off"
          spellcheck={false}
          required
          aria-describedby="key-what"
          value={key}
          onInput={(event) => setKey(event.currentTarget.value)}
        />
        {trouble && (
          <p class="trouble" role="alert">
            {trouble}
          </p>
        )}
        <button type="submit" class="main-button" disabled={busy}>
          {busy ? words.sign.busy : words.sign.button}
        </button>
      </form>
    </Frame>
  )
}
