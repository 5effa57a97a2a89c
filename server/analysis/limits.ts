/** Analysis has no room for another question now. */
export class TooBusy extends Error {
  constructor(message: string) {
    super(message)
    this.name = 'TooBusy'
  }
}

/** The question asks for more than one analysis may load. */
export class TooMuch extends Error {
  constructor(message: string) {
    super(message)
    this.name = 'TooMuch'
  }
}

/** The longest span one question may ask about. */
export const MAX_SPAN_MS: number = 3_653 * 86_400_000
/** The most readings one analysis loads: 16 bytes each. */
export const MAX_READINGS_LOADED = 20_000_000
