import type { BudgetLine } from '../contract/findings.ts'
import { CoreError } from '../errors.ts'

/** More circuits than this are spread by the largest-first rule, which is not always the best. */
export const MOST_EXACT = 24
/** Two spreads closer than this are the same to any clamp, mA. */
const SAME_MA = 0.01

/** Circuits over devices. */
export interface Spread {
  /** Circuits of each device; the most loaded device first, each in the order given. */
  readonly devices: readonly { readonly of: readonly string[]; readonly ma: number; readonly highMa: number }[]
  /** Upper end of the most loaded device, mA. */
  readonly worstMa: number
  /** Circuits without a figure, left out. */
  readonly unjudged: readonly string[]
  /** False when there were too many circuits to try all. */
  readonly exact: boolean
}

/**
 * Splits circuits over `n` devices so that the most loaded one, by the upper ends of its circuits' intervals, stays
 * least (methods.md §11): branch and bound, largest first, the first spread by Graham's rule (1969). Within 0.01 mA of the
 * best up to 24 circuits. Takes the circuits' lines of the budget; loads are part of theirs. What leaks less than nothing counts as nothing.
 * @throws {CoreError} out_of_range when n is no whole number from 1 to 24
 */
export function spread(lines: readonly BudgetLine[], n: number): Spread {
  if (!Number.isInteger(n) || n < 1 || n > 24)
    throw new CoreError('out_of_range', `spread needs 1 to 24 devices, got ${n}`)
  const circuits = lines.filter((line) => line.of.startsWith('circuit:'))
  const judged = circuits.filter((line) => line.ma !== null)
  const sizes = judged.map((line) => Math.max(0, line.high ?? line.ma ?? 0))
  const order = sizes.map((_, i) => i).sort((a, b) => sizes[b]! - sizes[a]! || a - b)
  const sorted = Float64Array.from(order, (i) => sizes[i]!)
  const exact = sorted.length <= MOST_EXACT
  const first = largestFirst(sorted, n)
  const best = exact ? branchAndBound(sorted, n, first) : first
  const devices = Array.from({ length: n }, (_, device) => {
    const members = judged.filter((_, i) => best[order.indexOf(i)] === device)
    return {
      of: members.map((line) => line.of),
      ma: members.reduce((sum, line) => sum + Math.max(0, line.ma ?? 0), 0),
      highMa: members.reduce((sum, line) => sum + Math.max(0, line.high ?? line.ma ?? 0), 0),
    }
  })
  devices.sort((a, b) => b.highMa - a.highMa || (a.of.join() < b.of.join() ? -1 : 1))
  return {
    devices,
    worstMa: devices[0]!.highMa,
    unjudged: circuits.filter((line) => line.ma === null).map((line) => line.of),
    exact,
  }
}

/** Each, largest first, to the device with least on it: at most 4/3 of the best (Graham 1969). */
function largestFirst(sizes: Float64Array, n: number): Uint8Array {
  const loads = new Float64Array(n)
  return Uint8Array.from(sizes, (size) => {
    let least = 0
    for (let d = 1; d < n; d++) if (loads[d]! < loads[least]!) least = d
    loads[least]! += size
    return least
  })
}

function branchAndBound(sizes: Float64Array, n: number, first: Uint8Array): Uint8Array {
  const rest = new Float64Array(sizes.length + 1)
  for (let i = sizes.length - 1; i >= 0; i--) rest[i] = rest[i + 1]! + sizes[i]!
  const floor = Math.max(rest[0]! / n, sizes[0] ?? 0)
  const loads = new Float64Array(n)
  first.forEach((device, i) => {
    loads[device]! += sizes[i]!
  })
  let bestWorst = Math.max(...loads)
  let best = first
  loads.fill(0)
  const chosen = new Uint8Array(sizes.length)
  // Same devices' loads at the same depth, in whatever order, end the same: look at them once.
  const seen = new Set<string>()

  const place = (i: number, worst: number): void => {
    if (bestWorst <= floor + SAME_MA / 2) return
    if (i === sizes.length) {
      bestWorst = worst
      best = chosen.slice()
      return
    }
    if (seen.size < 500_000) {
      const key = `${i}:${Array.from(loads, (x) => Math.round(x / (SAME_MA / 50)))
        .sort((a, b) => a - b)
        .join()}`
      if (seen.has(key)) return
      seen.add(key)
    }
    const tried: number[] = []
    const devices = Array.from(loads.keys()).sort((a, b) => loads[a]! - loads[b]! || a - b)
    for (const device of devices) {
      const held = loads[device]!
      const load = held + sizes[i]!
      // Devices with equal loads are interchangeable.
      if (load >= bestWorst - SAME_MA / 2 || tried.includes(held)) continue
      tried.push(held)
      loads[device] = load
      chosen[i] = device
      place(i + 1, Math.max(worst, load))
      loads[device] = held
    }
  }
  place(0, 0)
  return best
}
