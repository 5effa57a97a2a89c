import { PassThrough, type Readable } from 'node:stream'
import type { RecordKind } from '../../core/contract/index.ts'
import type { Caller } from './callers.ts'

/** What arrived at a site. */
export type LiveEvent =
  | {
      readonly kind: 'readings'
      readonly channel: string
      readonly from: number
      readonly to: number
      readonly stored: number
    }
  | { readonly kind: 'records'; readonly record: RecordKind }
  | { readonly kind: 'sheet' }
  /** Something was noticed, or is over. */
  | { readonly kind: 'matters' }

interface Listener {
  readonly site: string
  readonly keyId: string
  readonly session: string | null
  readonly stream: PassThrough
}

const HEARTBEAT_MS = 15_000
/** A listener that is this far behind is let go; it comes back and reads afresh. */
const MOST_WAITING_BYTES = 256 * 1024
const MOST_LISTENERS = 2_000

/** The open streams of all sites, as text/event-stream. */
export class LiveHub {
  readonly #listeners = new Set<Listener>()
  readonly #heartbeat: NodeJS.Timeout
  readonly #watchers: ((site: string, event: LiveEvent) => void)[] = []
  #closed = false

  constructor() {
    this.#heartbeat = setInterval(() => this.#write(this.#listeners, ': still here\n\n'), HEARTBEAT_MS)
    this.#heartbeat.unref()
  }

  /** A stream of what arrives at a site from now on; undefined when there are too many, or the server stops. */
  open(site: string, caller: Caller): Readable | undefined {
    if (this.#closed || this.#listeners.size >= MOST_LISTENERS) return undefined
    const stream = new PassThrough()
    const session = caller.session === null ? null : Buffer.from(caller.session).toString('hex')
    const listener = { site, keyId: caller.key.id, session, stream }
    this.#listeners.add(listener)
    stream.on('close', () => this.#listeners.delete(listener))
    stream.write('retry: 3000\n\n: listening\n\n')
    return stream
  }

  /** True when somebody listens to this site. */
  heard(site: string): boolean {
    for (const listener of this.#listeners) if (listener.site === site) return true
    return false
  }

  /** Calls for every event of every site, from inside the server. */
  watch(watcher: (site: string, event: LiveEvent) => void): void {
    this.#watchers.push(watcher)
  }

  tell(site: string, event: LiveEvent): void {
    for (const watcher of this.#watchers) watcher(site, event)
    const listeners = [...this.#listeners].filter((listener) => listener.site === site)
    if (listeners.length > 0) this.#write(listeners, written(event))
  }

  /** Ends what was opened with a key that has ended. */
  endKey(keyId: string): void {
    this.#end((listener) => listener.keyId === keyId)
  }

  /** Ends what a page has open that signed out. */
  endSession(session: Uint8Array): void {
    const hex = Buffer.from(session).toString('hex')
    this.#end((listener) => listener.session === hex)
  }

  endSite(site: string): void {
    this.#end((listener) => listener.site === site)
  }

  close(): void {
    this.#closed = true
    clearInterval(this.#heartbeat)
    this.#end(() => true)
  }

  #end(which: (listener: Listener) => boolean): void {
    for (const listener of [...this.#listeners].filter(which)) {
      this.#listeners.delete(listener)
      listener.stream.end()
    }
  }

  #write(listeners: Iterable<Listener>, text: string): void {
    for (const listener of listeners) {
      if (listener.stream.writableLength > MOST_WAITING_BYTES) {
        this.#listeners.delete(listener)
        listener.stream.destroy()
      } else listener.stream.write(text)
    }
  }
}

/** An event in the form of text/event-stream. */
function written(event: LiveEvent): string {
  const { kind, ...rest } = event
  const data = event.kind === 'records' ? { kind: event.record } : rest
  return `event: ${kind}\ndata: ${JSON.stringify(data)}\n\n`
}
