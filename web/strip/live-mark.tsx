import type { JSX } from 'preact'
import { useEffect, useState } from 'preact/hooks'
import type { Live } from '../sheet/use-live.ts'
import { words } from '../words.ts'

/** How long the word "new readings" stands after they came. */
const FRESH = 4_000

/** A quiet word that readings come in, or that they do not. */
export function LiveMark({ live }: { live: Live }): JSX.Element {
  const [fresh, setFresh] = useState(false)
  useEffect(() => {
    if (live.readings === 0) return
    setFresh(true)
    const timer = setTimeout(() => setFresh(false), FRESH)
    return () => clearTimeout(timer)
  }, [live.readings])
  const text = !live.up ? words.strip.notLive : fresh ? words.strip.fresh : words.strip.live
  return <span class={`live ${live.up ? 'up' : 'down'} ${fresh ? 'fresh' : ''}`}>{text}</span>
}
