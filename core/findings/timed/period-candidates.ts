const SHORTEST = 1
const LONGEST = 240
/** Starts so many places apart are compared: one or two in between may be missing, or be another's. */
const MOST_LAG = 3
/** Logarithmic width of a bin of distances. */
export const BIN = 0.015
const MOST_CANDIDATES = 3
/** Least distances in a bin and its neighbours, and how far they must stand above the bins round them: thermostats spread. */
const LEAST_ALIKE = 3
const SHARP = 2
/** A period that holds leaves its distance in this share of its turns, or so often that it held for a while. */
const OF_TURNS = 0.2
const ENOUGH = 40

/** Periods that stand out among the distances of neighbouring starts, hours. */
export function periodCandidates(hours: Float64Array, longest: number): number[] {
  const counts = new Map<number, number>()
  for (let lag = 1; lag <= MOST_LAG; lag++) {
    for (let i = lag; i < hours.length; i++) {
      const distance = hours[i]! - hours[i - lag]!
      if (distance < SHORTEST || distance > Math.min(LONGEST, longest)) continue
      const bin = Math.round(Math.log(distance) / BIN)
      counts.set(bin, (counts.get(bin) ?? 0) + 1)
    }
  }
  const within = (bin: number, reach: number): number => {
    let sum = 0
    for (let b = bin - reach; b <= bin + reach; b++) sum += counts.get(b) ?? 0
    return sum
  }
  const smooth = [...counts.keys()].flatMap((bin) => {
    const peak = within(bin, 1)
    const turns = (hours.at(-1)! - hours[0]!) / Math.exp(bin * BIN)
    const isSharp =
      peak >= Math.max(LEAST_ALIKE, Math.min(ENOUGH, OF_TURNS * turns)) && peak / 3 >= SHARP * (within(bin, 10) / 21)
    return isSharp ? [{ bin, count: peak + counts.get(bin)! }] : []
  })
  smooth.sort((a, b) => b.count - a.count || a.bin - b.bin)
  const chosen: number[] = []
  for (const { bin } of smooth) {
    if (chosen.length === MOST_CANDIDATES) break
    if (chosen.every((other) => Math.abs(other - bin) > 2)) chosen.push(bin)
  }
  return chosen.map((bin) => Math.exp(bin * BIN))
}
