import type { Finding } from '../../core/contract/index.ts'
import { Findings } from '../../core/contract/index.ts'
import { TooBusy, TooMuch } from '../analysis/limits.ts'
import { type SiteRecord, StoreError } from '../store/port.ts'

/** What alerts need of the findings of a device. */
export interface DeviceFacts {
  readonly rcd: string
  readonly tripMa: number
  readonly basis: string
  readonly proof: Finding.Proof
  /** Trips that the log shows and nobody wrote down, epoch ms: when it opened, or within which time. */
  readonly unwritten: readonly { readonly from: number; readonly to: number }[]
}

/** Answers what the findings of a device are. */
export type AskFindings = (site: SiteRecord, rcd: string) => Promise<{ readonly body: string }>

interface Kept {
  readonly revision: number
  readonly askedElapsed: number
  readonly facts: DeviceFacts | undefined
  /** Something that matters to them was written down since. */
  readonly outdated: boolean
}

/** Findings are asked for no more often than this for one device: with every post they would be new. */
const FRESH_MS = 3_600_000
/** Nor than this, whatever was written down: whoever may write trips down must not keep the analysis busy. */
const LEAST_MS = 60_000

const Needed = Findings.pick({ headroom: true, proof: true, trips: true })

/** The facts of devices, asked for in the background, one device after the other, so that nothing waits for them. */
export class FactsOfDevices {
  readonly #ask: AskFindings
  readonly #elapsed: () => number
  readonly #warn: (error: unknown) => void
  readonly #kept = new Map<string, Kept>()
  readonly #wanted = new Map<string, { readonly site: SiteRecord; readonly rcd: string }>()
  #running: Promise<void> | undefined

  constructor(ask: AskFindings, elapsed: () => number, warn: (error: unknown) => void) {
    this.#ask = ask
    this.#elapsed = elapsed
    this.#warn = warn
  }

  /** What is known of a device now; asks anew where that is old and something changed since. */
  of(site: SiteRecord, rcd: string): DeviceFacts | undefined {
    const key = `${site.id}/${rcd}`
    const kept = this.#kept.get(key)
    const age = kept === undefined ? Number.POSITIVE_INFINITY : this.#elapsed() - kept.askedElapsed
    const old = age >= (kept?.outdated === true ? LEAST_MS : FRESH_MS)
    if (old && kept?.revision !== site.revision) {
      this.#wanted.set(key, { site, rcd })
      this.#running ??= this.#run().finally(() => {
        this.#running = undefined
      })
    }
    return kept?.facts
  }

  /** Asks again at the next look, as after a ramp test or a remedy was written down. */
  expire(site: string): void {
    for (const [key, kept] of this.#kept) {
      if (key.startsWith(`${site}/`)) this.#kept.set(key, { ...kept, outdated: true })
    }
  }

  /** Resolves when nothing is being asked. */
  async settled(): Promise<void> {
    await this.#running
  }

  async #run(): Promise<void> {
    for (;;) {
      const [next] = this.#wanted
      if (next === undefined) return
      const [key, { site, rcd }] = next
      this.#wanted.delete(key)
      const before = this.#kept.get(key)?.facts
      // What is written down while the answer is on its way makes it outdated, too.
      const asked = { revision: site.revision, askedElapsed: this.#elapsed(), facts: before, outdated: false }
      this.#kept.set(key, asked)
      const facts = (await this.#facts(site, rcd)) ?? before
      this.#kept.set(key, { ...asked, facts, outdated: this.#kept.get(key)?.outdated === true })
    }
  }

  async #facts(site: SiteRecord, rcd: string): Promise<DeviceFacts | undefined> {
    try {
      const { body } = await this.#ask(site, rcd)
      const { headroom, proof, trips } = Needed.parse(JSON.parse(body))
      const unwritten = trips.filter(({ id }) => id === null).flatMap((trip) => spanOf(trip) ?? [])
      return { rcd, tripMa: headroom.tripMa.value, basis: headroom.tripMa.basis, proof, unwritten }
    } catch (error) {
      const passing = error instanceof TooBusy || error instanceof TooMuch || error instanceof StoreError
      if (!passing) this.#warn(error)
      return undefined
    }
  }
}

function spanOf({
  at,
  after,
  before,
}: Finding.TripFinding): { readonly from: number; readonly to: number } | undefined {
  const from = at ?? after
  const to = at ?? before
  return from === null || to === null ? undefined : { from: Date.parse(from), to: Date.parse(to) }
}
