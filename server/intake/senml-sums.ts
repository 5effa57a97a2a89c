interface LastSum {
  readonly index: number
  readonly seconds: number
  readonly sum: number
  used: boolean
}

/**
 * What sums say (RFC 8428, section 4.3: the integral of the value since some start, in value × s): the mean of the value
 * between two sums of one name, at the time of the later one. The first sum of a name is where the next one counts from.
 */
export class SumMeans {
  readonly #last = new Map<string, LastSum>()

  /** Undefined for the first sum of a name; otherwise what lies between it and the one before. */
  next(
    name: string,
    index: number,
    seconds: number,
    sum: number,
  ): { readonly mean: number; readonly difference: number } | { readonly why: string } | undefined {
    const before = this.#last.get(name)
    this.#last.set(name, { index, seconds, sum, used: before !== undefined })
    if (before === undefined) return undefined
    before.used = true
    const span = seconds - before.seconds
    if (!(span > 0)) return { why: 'sums of one name follow each other in time' }
    const difference = subtractDecimal(sum, before.sum)
    return { mean: Number((difference / span).toPrecision(12)), difference }
  }

  /** Records whose sum was the only one of its name. */
  alone(): number[] {
    return [...this.#last.values()].filter(({ used }) => !used).map(({ index }) => index)
  }
}

/** Subtracts as a person would: no digits that the larger of the two could not hold. */
function subtractDecimal(a: number, b: number): number {
  const size = Math.max(Math.abs(a), Math.abs(b))
  if (size === 0 || !Number.isFinite(a - b)) return a - b
  const places = Math.min(15, Math.max(0, 15 - Math.ceil(Math.log10(size))))
  return Number((a - b).toFixed(places))
}
