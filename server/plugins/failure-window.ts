const WINDOW_MS = 60_000
const MOST = 600
/** More addresses than this are not remembered; the oldest go first. */
const ADDRESSES = 10_000

/**
 * Counts wrong keys per address in windows of a minute. A right key is never asked here, so that nobody is locked
 * out by a neighbour behind the same address.
 */
export class FailureWindow {
  readonly #seen = new Map<string, { start: number; count: number }>()

  /** Counts one failure; returns how long (ms) the address has to wait, 0 while it may go on. */
  add(address: string, at: number): number {
    const held = this.#seen.get(address)
    const window =
      held !== undefined && at >= held.start && at - held.start < WINDOW_MS ? held : { start: at, count: 0 }
    window.count++
    this.#seen.delete(address)
    this.#seen.set(address, window)
    if (this.#seen.size > ADDRESSES) this.#seen.delete(this.#seen.keys().next().value!)
    return window.count > MOST ? window.start + WINDOW_MS - at : 0
  }
}
