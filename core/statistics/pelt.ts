/**
 * Optimal partitioning with pruning (PELT): change points that minimise the sum of segment costs plus `penalty` for each. `cost(from,
 * to)` is that of [from, to); splitting a segment must never raise the sum. No segment is shorter than
 * `minSegment`. Exact; about linear in n when changes keep coming, quadratic when there are none.
 *
 * @see Jackson et al. (2005), IEEE Signal Process. Lett. 12, 105-108; Killick, Fearnhead & Eckley (2012), JASA 107, 1590-1598
 */
export function pelt(
  n: number,
  cost: (from: number, to: number) => number,
  penalty: number,
  minSegment: number,
): number[] {
  // best[t]: least penalised cost of the first t values, with a penalty for every segment; last[t]: where its last segment starts.
  const best = new Float64Array(n + 1).fill(Number.POSITIVE_INFINITY)
  const last = new Int32Array(n + 1)
  best[0] = -penalty
  let candidates: number[] = []
  // A start beaten at time t by a change at t may go once t itself may start a segment, minSegment later.
  const dropAt = new Map<number, number>()
  for (let t = minSegment; t <= n; t++) {
    if (best[t - minSegment]! < Number.POSITIVE_INFINITY) candidates.push(t - minSegment)
    candidates = candidates.filter((from) => !((dropAt.get(from) ?? n + 1) <= t))
    const reached = candidates.map((from) => best[from]! + cost(from, t))
    reached.forEach((value, i) => {
      if (value + penalty < best[t]!) {
        best[t] = value + penalty
        last[t] = candidates[i]!
      }
    })
    reached.forEach((value, i) => {
      // A hair of slack: rounding must not prune the start of an equally good partition.
      if (value > best[t]! + 1e-12 * Math.abs(best[t]!) && !dropAt.has(candidates[i]!)) {
        dropAt.set(candidates[i]!, t + minSegment)
      }
    })
  }
  const changepoints: number[] = []
  if (best[n]! < Number.POSITIVE_INFINITY) for (let t = last[n]!; t > 0; t = last[t]!) changepoints.push(t)
  return changepoints.reverse()
}
