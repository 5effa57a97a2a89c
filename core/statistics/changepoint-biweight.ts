import { requireRange } from './checks.ts'
import { type Partition, partitionOf, requireSeries } from './partition.ts'
import { quantile } from './quantile.ts'

/**
 * Change points with the biweight loss min((y − θ)², k²) and a penalty for each: a value farther than k from its segment's level
 * costs the same however far, so a lone spike is passed over while a lasting step is found. Usual settings: k = 3σ,
 * penalty = 2σ² ln n, σ the noise (MAD of differences / √2).
 *
 * Functional pruning keeps, as a function of the running level θ, the cost of the best partition that ends there: a
 * list of intervals with a parabola each. Exact, and about linear in n in practice.
 *
 * @throws {CoreError} not_finite, out_of_range
 * @see Fearnhead & Rigaill (2019), JASA 114, 169-183 (R-FPOP); Maidstone et al. (2017), Stat. Comput. 27, 519-533 (FPOP)
 */
export function changepointBiweight(
  y: ArrayLike<number>,
  options: { readonly penalty: number; readonly k: number },
): Partition {
  const { penalty, k } = options
  requireSeries('changepointBiweight', y, penalty)
  requireRange('changepointBiweight', k > 0, 'k above 0', k)
  return functionalPartition(y, penalty, k)
}

/** The same for k = Infinity too, which is squared error. */
export function functionalPartition(y: ArrayLike<number>, penalty: number, k: number): Partition {
  const n = y.length
  if (n === 0) return partitionOf(0, [], penalty, () => ({ value: 0, cost: 0 }))
  // Levels are taken from a centre, so that a large offset costs no digits.
  const centre = quantile(y, 0.5)
  const at = Float64Array.from(y, (v) => v - centre)
  const level = new Float64Array(n + 1)
  const start = new Int32Array(n + 1)

  let now = new Pieces()
  let next = new Pieces()
  const [least, most] = [at.reduce((a, b) => Math.min(a, b)), at.reduce((a, b) => Math.max(a, b))]
  now.add(least, most, 0, 0, 0, 0)
  for (let t = 1; t <= n; t++) {
    if (t > 1) {
      // From here on a new segment may begin at value t − 1, for the best cost so far and the penalty.
      now.capInto(next, now.leastCost + penalty, t - 1)
      ;[now, next] = [next, now]
    }
    now.addLossInto(next, at[t - 1]!, k)
    ;[now, next] = [next, now]
    now.findLeast()
    level[t] = now.leastLevel
    start[t] = now.leastStart
  }

  const changepoints: number[] = []
  const levels = new Map<number, number>()
  for (let to = n; to > 0; to = start[to]!) {
    levels.set(start[to]!, level[to]!)
    if (start[to]! > 0) changepoints.push(start[to]!)
  }
  return partitionOf(n, changepoints.reverse(), penalty, (from, to) => {
    const value = levels.get(from)!
    let cost = 0
    for (let i = from; i < to; i++) cost += Math.min((at[i]! - value) ** 2, k * k)
    return { value: value + centre, cost }
  })
}

/**
 * A function of the level θ in pieces: on [low, high] it is weight (θ − mean)² + base, weight being the number of values within
 * k, mean their mean. `start` is where the segment of that piece begins. Neighbours that are equal are joined.
 */
class Pieces {
  private low: number[] = []
  private high: number[] = []
  private weight: number[] = []
  private mean: number[] = []
  private base: number[] = []
  private start: number[] = []
  private count = 0
  leastCost = 0
  leastLevel = 0
  leastStart = 0

  add(low: number, high: number, weight: number, mean: number, base: number, start: number): void {
    const before = this.count - 1
    if (
      before >= 0 &&
      this.start[before] === start &&
      this.weight[before] === weight &&
      this.base[before] === base &&
      (weight === 0 || this.mean[before] === mean)
    ) {
      this.high[before] = high
      return
    }
    // An interval of no length says nothing that its neighbours do not.
    if (high <= low && before >= 0) return
    const i = this.count++
    this.low[i] = low
    this.high[i] = high
    this.weight[i] = weight
    this.mean[i] = mean
    this.base[i] = base
    this.start[i] = start
  }

  /** Writes min(this, cap) to `target`; where the cap is less, the segment starts anew at `start`. */
  capInto(target: Pieces, cap: number, start: number): void {
    target.count = 0
    for (let i = 0; i < this.count; i++) {
      const [low, high, weight, base] = [this.low[i]!, this.high[i]!, this.weight[i]!, this.base[i]!]
      const mean = this.mean[i]!
      const reach = base > cap ? -1 : weight === 0 ? Number.POSITIVE_INFINITY : Math.sqrt((cap - base) / weight)
      const [from, to] = [Math.max(low, mean - reach), Math.min(high, mean + reach)]
      if (reach < 0 || from > to) {
        target.add(low, high, 0, 0, cap, start)
        continue
      }
      if (from > low) target.add(low, from, 0, 0, cap, start)
      target.add(from, to, weight, mean, base, this.start[i]!)
      if (to < high) target.add(to, high, 0, 0, cap, start)
    }
  }

  /** Writes this + min((y − θ)², k²) to `target`. */
  addLossInto(target: Pieces, y: number, k: number): void {
    target.count = 0
    const [left, right] = [y - k, y + k]
    for (let i = 0; i < this.count; i++) {
      const [low, high, weight, mean, base, start] = [
        this.low[i]!,
        this.high[i]!,
        this.weight[i]!,
        this.mean[i]!,
        this.base[i]!,
        this.start[i]!,
      ]
      if (low < left) target.add(low, Math.min(high, left), weight, mean, base + k * k, start)
      const [from, to] = [Math.max(low, left), Math.min(high, right)]
      if (from <= to) {
        // Completing the square with one value more.
        const off = y - mean
        const more = weight + 1
        target.add(from, to, more, mean + off / more, base + (off * off * weight) / more, start)
      }
      if (high > right) target.add(Math.max(low, right), high, weight, mean, base + k * k, start)
    }
  }

  /** Finds the least value, its level and its segment's start; ties go to the earlier start, the longer segment. */
  findLeast(): void {
    this.leastCost = Number.POSITIVE_INFINITY
    for (let i = 0; i < this.count; i++) {
      const level = Math.min(this.high[i]!, Math.max(this.low[i]!, this.mean[i]!))
      const cost = this.base[i]! + this.weight[i]! * (level - this.mean[i]!) ** 2
      if (cost < this.leastCost || (cost === this.leastCost && this.start[i]! < this.leastStart)) {
        this.leastCost = cost
        this.leastLevel = level
        this.leastStart = this.start[i]!
      }
    }
  }
}
