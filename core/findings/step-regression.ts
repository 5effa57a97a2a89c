import tQuantile from '@stdlib/stats-base-dists-t-quantile'
import { stateAt } from '../timeline/exposure.ts'
import { intersect, totalMs } from '../timeline/spans.ts'
import type { Thing } from '../timeline/timeline.ts'
import { type SparseDesign, separability } from './budget/separability.ts'
import { type WeightedFit, weightedFit } from './budget/weighted-fit.ts'
import { medianInPlace } from './levels.ts'
import type { StepRow, StepRows } from './step-rows.ts'

const MAD_TO_SIGMA = 1.4826
/** The pooled wander counts like this many switchings when an own spread is mixed with it. */
const POOLED_WEIGHT = 4
/** Neighbouring rows share a level: for a thing that goes on and off in turn the variance is half as large again. */
const SHARED_LEVEL = 1.5

/** What switching one thing changes, mA. */
export interface StepEstimate {
  readonly ma: number
  /** Standard error, and the degrees of freedom it rests on. */
  readonly error: number
  readonly freedom: number
  /** Half-width of the 90 % interval. */
  readonly half: number
  readonly switchings: number
  /** Of a circuit, what stays when none of its known loads runs; the same as `ma` where none is known. */
  readonly baseMa: number
  /** Positions of the things that the data cannot tell from this one; then `ma` says nothing. */
  readonly inseparable: readonly number[]
}

/**
 * Regression of level differences on state differences with Huber weights, one coefficient a thing; a circuit's coefficient is that of the
 * circuit with nothing running on it, and its figure adds each known load by the share of time that it runs. Variances are a
 * mix of the rows' own (sandwich) and of the wander of the level where nothing was switched, so that two or three
 * switchings do not feign agreement. Key: position of the thing. O(rows × iterations + things³).
 */
export function stepRegression(
  things: readonly Thing[],
  rows: StepRows,
  leastScale: number,
): Map<number, StepEstimate> {
  const steps = withoutRiders(things, rows.steps)
  const columns = [...new Set(steps.flatMap((row) => row.things))].sort((a, b) => a - b)
  const position = new Map(columns.map((thing, j) => [thing, j]))
  const full: SparseDesign = {
    p: columns.length,
    index: steps.map((row) => row.things.map((thing) => position.get(thing)!)),
    signs: steps.map((row) => row.signs),
    y: Float64Array.from(steps, (row) => row.ma),
  }
  const { basis, partners } = separability(full)
  const wander = Math.max(wanderOf(rows, basis.length), leastScale, 1e-9)
  const long = Math.max(wander, longWander(rows) ?? 0)
  const sds = Float64Array.from(steps, (row) => (row.long ? long : wander))
  const fit = weightedFit(reduced(full, basis), sds)
  const known = new Map<number, number>()
  columns.forEach((thing, j) => {
    const b = basis.indexOf(j)
    if (b >= 0 && partners[j]!.length === 0) known.set(thing, b)
  })
  const contrasts = [...known].map(([thing, b]) => contrastOf(things, thing, b, known))
  const variances = fit.variancesOf(contrasts)
  const roam = roamOf(things, rows, known, fit)
  const estimates = new Map<number, StepEstimate>()
  columns.forEach((thing, j) => {
    const own = steps.filter((row) => row.things.includes(thing))
    const switchings = own.length
    const inseparable = partners[j]!.map((k) => columns[k]!)
    const c = [...known.keys()].indexOf(thing)
    if (c < 0) {
      const nothing = { ma: Number.NaN, error: Number.NaN, freedom: 0, half: Number.NaN, baseMa: Number.NaN }
      estimates.set(thing, { ...nothing, switchings, inseparable })
      return
    }
    const free = Math.max(0, switchings - 1)
    const model = SHARED_LEVEL * variances.model[c]!
    const unseen = unseenVariance(things, thing, own, roam)
    const variance = (POOLED_WEIGHT * model + free * variances.sandwich[c]!) / (POOLED_WEIGHT + free) + unseen
    const error = Math.sqrt(variance)
    const freedom = POOLED_WEIGHT + free
    const ma = contrasts[c]!.reduce((sum, [b, weight]) => sum + weight * fit.coefficients[b]!, 0)
    const half = tQuantile(0.95, freedom) * error
    const baseMa = fit.coefficients[known.get(thing)!]!
    estimates.set(thing, { ma, error, freedom, half, switchings, baseMa, inseparable })
  })
  return estimates
}

/** Rows in which a load that never changes without its circuit is part of the circuit. */
function withoutRiders(things: readonly Thing[], steps: readonly StepRow[]): readonly StepRow[] {
  const circuitAt = new Map(
    things.flatMap((thing, i) => (thing.kind === 'circuit' ? [[thing.circuit, i] as const] : [])),
  )
  const withIts = (row: StepRow, thing: number): boolean =>
    things[thing]!.kind === 'load' && row.things.includes(circuitAt.get(things[thing]!.circuit) ?? -1)
  const alone = new Set<number>()
  for (const row of steps) for (const thing of row.things) if (!withIts(row, thing)) alone.add(thing)
  return steps.map((row) => {
    const stay = row.things.map((thing) => alone.has(thing))
    if (stay.every(Boolean)) return row
    return { ...row, things: row.things.filter((_, k) => stay[k]), signs: row.signs.filter((_, k) => stay[k]) }
  })
}

function reduced(full: SparseDesign, basis: readonly number[]): SparseDesign {
  const at = new Map(basis.map((j, b) => [j, b]))
  return {
    p: basis.length,
    index: full.index.map((row) => row.flatMap((j) => at.get(j) ?? [])),
    signs: full.signs.map((row, i) => row.filter((_, k) => at.has(full.index[i]![k]!))),
    y: full.y,
  }
}

/** A load's own coefficient; a circuit's, and its loads' by the share of its time in which they run. */
function contrastOf(
  things: readonly Thing[],
  thing: number,
  b: number,
  known: ReadonlyMap<number, number>,
): (readonly [number, number])[] {
  const contrast: (readonly [number, number])[] = [[b, 1]]
  const { kind, circuit, state } = things[thing]!
  if (kind === 'load') return contrast
  things.forEach((load, k) => {
    const column = known.get(k)
    if (load.kind !== 'load' || load.circuit !== circuit || column === undefined) return
    const on = totalMs(load.state.on)
    const off = totalMs(intersect(load.state.off, state.on))
    if (on > 0) contrast.push([column, on / (on + off)])
  })
  return contrast
}

/**
 * How much a level differs from the next of itself, as a standard deviation. Where there is hardly a place without
 * switching to see it, a fifth of the usual step stands in, so that a figure without a second look never seems exact.
 */
function wanderOf({ steps, placebos }: StepRows, coefficients: number): number {
  if (placebos.length >= 5) return spread(placebos)
  const seen = placebos.length === 0 ? 0 : Math.max(...placebos.map((row) => Math.abs(row.ma)))
  return steps.length > coefficients + 3 || steps.length === 0 ? seen : Math.max(seen, 0.2 * spread(steps))
}

/** The same for levels over hours; null without places enough to see it. */
function longWander({ longPlacebos }: StepRows): number | null {
  return longPlacebos.length >= 4 ? spread(longPlacebos) : null
}

function spread(rows: readonly StepRow[]): number {
  return MAD_TO_SIGMA * medianInPlace(Float64Array.from(rows, (row) => Math.abs(row.ma)))
}

/** Spread of the level from time to time that no known thing explains, as a standard deviation, mA. */
function roamOf(
  things: readonly Thing[],
  { placebos }: StepRows,
  known: ReadonlyMap<number, number>,
  fit: WeightedFit,
): number {
  if (placebos.length < 5) return 0
  const rest = Float64Array.from(placebos, ({ at, before }) => {
    let level = before
    for (const [thing, b] of known) if (stateAt(things[thing]!.state, at) === 'on') level -= fit.coefficients[b]!
    return level
  })
  const middle = medianInPlace(rest.slice())
  return MAD_TO_SIGMA * medianInPlace(rest.map((level) => Math.abs(level - middle)))
}

/**
 * What ran unseen on a circuit as it was switched: its part of what roams, by its share of the loads whose state nobody knows. Every circuit
 * counts one more, for what stands on no sheet.
 */
function unseenVariance(things: readonly Thing[], thing: number, own: readonly StepRow[], roam: number): number {
  const { kind, circuit } = things[thing]!
  if (kind === 'load') return 0
  const unknown = things.filter((other) => other.kind === 'circuit' || other.state.on.length === 0)
  const here = unknown.filter((other) => other.circuit === circuit).length
  const short = own.filter((row) => !row.long).length
  return short === 0 ? 0 : (roam * roam * here * short) / unknown.length / own.length ** 2
}
