/** A set of causes, over all windows and habits. */
export interface CauseSet {
  /** Its members; empty for no cause at all. */
  readonly of: readonly string[]
  /** Posterior probability that these and no others are the causes. */
  readonly weight: number
  /** Expected number of trips that each member made. */
  readonly expected: readonly number[]
}

/** A set below this is left out. */
const LEAST = 1e-4

/**
 * The sets of a line-up without their windows, heaviest first, mixed with the prior as the doubt about the model wants
 * it (the prior knows single causes only; each then made all trips). `weight` of what comes in sums to 1.
 */
export function likelySets(
  trips: number,
  candidates: readonly { readonly of: string; readonly odds: number }[],
  weighed: readonly {
    readonly members: readonly number[]
    readonly weight: number
    readonly expected: readonly number[]
  }[],
  { doubt, priorNone }: { readonly doubt: number; readonly priorNone: number },
): CauseSet[] {
  const merged = new Map<string, { members: readonly number[]; weight: number; expected: Float64Array }>()
  const add = (members: readonly number[], weight: number, expected: readonly number[]): void => {
    const key = members.join()
    const held = merged.get(key) ?? { members, weight: 0, expected: new Float64Array(members.length) }
    held.weight += weight
    expected.forEach((made, place) => {
      held.expected[place]! += weight * made
    })
    merged.set(key, held)
  }
  for (const { members, weight, expected } of weighed) add(members, (1 - doubt) * weight, expected)
  const odds = candidates.reduce((sum, c) => sum + c.odds, 0)
  add([], doubt * (odds > 0 ? priorNone : 1), [])
  candidates.forEach((c, i) => {
    if (odds > 0) add([i], (doubt * (1 - priorNone) * c.odds) / odds, [trips])
  })
  const kept = [...merged.values()].filter((set) => set.weight >= LEAST)
  const sum = kept.reduce((all, set) => all + set.weight, 0)
  return kept
    .map((set) => ({
      of: set.members.map((c) => candidates[c]!.of),
      weight: set.weight / sum,
      expected: [...set.expected].map((made) => made / set.weight),
    }))
    .sort((a, b) => b.weight - a.weight || (a.of.join() < b.of.join() ? -1 : 1))
}
