import type { Taken } from '../intake/taken.ts'

/** A channel that is expected to go on. */
export interface Watched {
  readonly channel: string
  /** Since something last came, ms; by a clock that no one sets. */
  readonly silentMs: number
  /** How long it usually takes until it posts again, ms; null where it comes without any rhythm. */
  readonly everyMs: number | null
  /** When something last came, epoch ms; null when that was before this start of the server. */
  readonly lastAt: number | null
}

export interface Pace {
  readonly site: string
  readonly channel: string
  readonly gapMs: number
}

interface Seen {
  lastElapsed: number
  lastAt: number | null
  readonly gaps: number[]
  /** Learned before this start, or guessed from what one post held. */
  guessMs: number | undefined
  declaredMs: number | undefined
  /** A gap so long that it was a silence: no rhythm is learned from one alone. */
  oddMs: number | undefined
  savedMs: number | undefined
}

const GAPS_KEPT = 16
/** So many gaps say more than a guess. */
const GAPS_THAT_TELL = 2
const GAPS_THAT_TELL_RHYTHM = 6
/** Gaps that differ so much have no rhythm: a channel that posts when something changes. */
const NO_RHYTHM = 5
const TIMES_LOOKED_AT = 64
const ODD = 2.5

/**
 * When which channel last posted, and how often it does. It goes by arrivals, not by the times of readings: a logger
 * that posts every ten minutes is alive in between, and one whose clock is off is alive as well.
 */
export class Arrivals {
  readonly #elapsed: () => number
  readonly #now: () => number
  readonly #sites = new Map<string, Map<string, Seen>>()

  /** @param elapsed ms of a clock that only runs forward, whatever is done to the machine's time */
  constructor(elapsed: () => number, now: () => number) {
    this.#elapsed = elapsed
    this.#now = now
  }

  /** Takes up what was learned before this start. Every such channel counts as heard now. */
  load(paces: readonly Pace[]): void {
    for (const { site, channel, gapMs } of paces) {
      const seen = this.#seen(site, channel)
      seen.guessMs = gapMs
      seen.savedMs = gapMs
    }
  }

  note(site: string, { batches, expected }: Pick<Taken, 'batches' | 'expected'>): void {
    const elapsed = this.#elapsed()
    for (const { channel, t } of batches) {
      const known = this.#sites.get(site)?.has(channel) === true
      const seen = this.#seen(site, channel)
      const gap = elapsed - seen.lastElapsed
      // The first gap after a start is longer by the time the server was away, or began with nothing.
      if (known && seen.lastAt !== null && gap > 0) learn(seen, gap)
      seen.lastElapsed = elapsed
      seen.lastAt = this.#now()
      seen.declaredMs = expected?.get(channel) ?? seen.declaredMs
      seen.guessMs ??= guessFrom(t)
    }
  }

  sites(): readonly string[] {
    return [...this.#sites.keys()]
  }

  forget(site: string): void {
    this.#sites.delete(site)
  }

  watched(site: string): Watched[] {
    const elapsed = this.#elapsed()
    return [...(this.#sites.get(site) ?? [])].map(([channel, seen]) => ({
      channel,
      silentMs: elapsed - seen.lastElapsed,
      everyMs: paceOf(seen),
      lastAt: seen.lastAt,
    }))
  }

  /** Paces that changed enough to be kept; they count as kept from then on. */
  takeChangedPaces(): Pace[] {
    const changed: Pace[] = []
    for (const [site, channels] of this.#sites) {
      for (const [channel, seen] of channels) {
        const gapMs = paceOf(seen)
        if (gapMs === null || gapMs < 1) continue
        if (seen.savedMs !== undefined && Math.abs(gapMs - seen.savedMs) <= 0.2 * seen.savedMs) continue
        seen.savedMs = gapMs
        changed.push({ site, channel, gapMs })
      }
    }
    return changed
  }

  #seen(site: string, channel: string): Seen {
    const channels = this.#sites.get(site) ?? new Map<string, Seen>()
    this.#sites.set(site, channels)
    const seen = channels.get(channel) ?? {
      lastElapsed: this.#elapsed(),
      lastAt: null,
      gaps: [],
      guessMs: undefined,
      declaredMs: undefined,
      oddMs: undefined,
      savedMs: undefined,
    }
    channels.set(channel, seen)
    return seen
  }
}

/** A silence is no rhythm; two long gaps in a row are a new one. */
function learn(seen: Seen, gap: number): void {
  const pace = seen.gaps.length < GAPS_THAT_TELL ? null : paceOf(seen)
  if (pace !== null && gap > ODD * pace && seen.oddMs === undefined) {
    seen.oddMs = gap
    return
  }
  if (pace !== null && gap > ODD * pace && seen.oddMs !== undefined) seen.gaps.push(seen.oddMs)
  seen.oddMs = undefined
  seen.gaps.push(gap)
  while (seen.gaps.length > GAPS_KEPT) seen.gaps.shift()
}

function paceOf({ gaps, guessMs, declaredMs }: Seen): number | null {
  if (gaps.length < GAPS_THAT_TELL) return declaredMs ?? guessMs ?? null
  const sorted = gaps.toSorted((a, b) => a - b)
  const usual = sorted[(sorted.length - 1) >> 1]!
  // Nine of ten gaps are no longer than this.
  const long = sorted[Math.ceil(0.9 * sorted.length) - 1]!
  if (sorted.length >= GAPS_THAT_TELL_RHYTHM && long > NO_RHYTHM * usual) return declaredMs ?? null
  return Math.max(long, declaredMs ?? 0)
}

/** What one post lets expect: the next one comes when as much time is over as this one covers, and one reading more. */
function guessFrom(t: Float64Array): number | undefined {
  if (t.length < 2) return undefined
  const late = t.subarray(-TIMES_LOOKED_AT).toSorted()
  const steps = late.subarray(1).map((at, i) => at - late[i]!)
  const step = steps.toSorted()[steps.length >> 1]!
  if (!(step > 0)) return undefined
  let first = Number.POSITIVE_INFINITY
  let last = Number.NEGATIVE_INFINITY
  for (const at of t) {
    if (at < first) first = at
    if (at > last) last = at
  }
  // A post that covers days is a history, not a rhythm.
  return last - first > 86_400_000 ? undefined : last - first + step
}
