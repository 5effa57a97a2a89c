import type { BudgetLine, Headroom, SpreadFindings, SpreadPlan } from '../../contract/findings.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { spread } from '../spread.ts'
import { countOf, current, nameOf, rounded } from '../words.ts'
import { circuitDemand } from './circuit-demand.ts'

/** Devices that are tried. */
const DEVICES = [2, 3] as const
/** Circuits that are shown on an RCBO of their own, the largest. */
const MOST_ALONE = 8
/** Less than this is nothing that a clamp can place, mA. */
const LEAST_MA = 0.05
/** With more of the standing leakage than this on no circuit a plan is only a beginning. */
const UNKNOWN_SHARE = 0.5

/**
 * What spreading the circuits over two or three devices would do, and what each would do on its own RCBO (methods.md §11): exact up to 24
 * circuits, by the upper ends of the intervals; standing share before and after against 0.3 IΔn. Too few figures are an answer in words.
 */
export function spreadFindings(timeline: Timeline, lines: readonly BudgetLine[], headroom: Headroom): SpreadFindings {
  const demand = circuitDemand(timeline, lines)
  const judged = demand.filter((line) => line.ma !== null)
  const unjudged = demand.filter((line) => line.ma === null).map((line) => line.of)
  const { ratedMa } = timeline.rcd
  const sum = judged.reduce((total, line) => total + Math.max(0, line.ma ?? 0), 0)
  const standing = headroom.standingMa?.p50 ?? null
  const rest = standing === null ? null : Math.max(0, standing - sum)
  const unplaced = rest !== null && rest < LEAST_MA ? 0 : rest
  const before = standing ?? sum
  const base = {
    circuits: judged.map(({ of, ma, high }) => ({
      of,
      ma: rounded(Math.max(0, ma ?? 0)),
      highMa: rounded(Math.max(0, high ?? ma ?? 0)),
    })),
    unjudged,
    unplacedMa: unplaced === null ? null : rounded(unplaced),
    nowShare: headroom.shareOfRating,
    advisedShare: headroom.advisedShare,
  }
  const alone = [...judged]
    .sort((a, b) => (b.ma ?? 0) - (a.ma ?? 0) || (a.of < b.of ? -1 : 1))
    .slice(0, MOST_ALONE)
    .map(({ of, ma }) => {
      const own = Math.max(0, ma ?? 0)
      const left = Math.max(0, before - own)
      return {
        of,
        ma: rounded(own),
        share: rounded(own / ratedMa),
        restMa: rounded(left),
        restShare: rounded(left / ratedMa),
      }
    })
  if (judged.length < 2) {
    return { ...base, plans: [], alone, text: tooFew(timeline, judged.length) }
  }
  const plans = DEVICES.filter((n) => n <= judged.length).map((n) => planOf(timeline, demand, n))
  const neutral = judged.some((line) => line.neutralStays === true)
    ? ' Figures of circuits whose breaker opens the line only leave out what leaks from their neutral.'
    : ''
  return { ...base, plans, alone, text: `${textOf(timeline, base, plans)}${neutral}` }
}

function planOf(timeline: Timeline, demand: readonly BudgetLine[], n: number): SpreadPlan {
  const { ratedMa } = timeline.rcd
  const found = spread(demand, n)
  const devices = found.devices.map(({ of, ma, highMa }) => ({
    of: [...of],
    ma: rounded(ma),
    highMa: rounded(highMa),
    share: rounded(ma / ratedMa),
  }))
  const groups = devices.map(
    ({ of, ma, share }) =>
      `${of.length === 0 ? 'nothing' : of.map((ref) => nameOf(timeline, ref)).join(' + ')} (${current(ma)} mA, ${share.toFixed(2)} of the rating)`,
  )
  const how = found.exact ? 'no other way is better' : 'near the best: too many circuits to try every way'
  return {
    devices,
    worstMa: rounded(found.worstMa),
    exact: found.exact,
    text: `On ${countOf(n, 'device')} of ${ratedMa} mA: ${groups.join('; ')}. The most loaded one has at most ${current(found.worstMa)} mA; ${how}.`,
  }
}

function textOf(
  timeline: Timeline,
  base: Pick<SpreadFindings, 'nowShare' | 'advisedShare' | 'unplacedMa' | 'unjudged'>,
  plans: readonly SpreadPlan[],
): string {
  const { ratedMa } = timeline.rcd
  const standing = base.nowShare === null ? null : base.nowShare * ratedMa
  const rest = base.unplacedMa ?? 0
  const now =
    standing === null
      ? ''
      : `${current(standing)} mA of standing leakage are ${base.nowShare!.toFixed(2)} of the rating; advised are ${base.advisedShare} at most.`
  const need =
    base.nowShare !== null && base.nowShare <= base.advisedShare ? 'The level alone does not ask for spreading.' : ''
  const help = `Switch ${base.unjudged.length > 0 ? base.unjudged.map((of) => nameOf(timeline, of)).join(', ') : 'each circuit'} off for some minutes with the clamp on the tails.`
  if (standing !== null && rest > UNKNOWN_SHARE * standing) {
    return words(
      now,
      `Only ${current(standing - rest)} mA of it can be placed on circuits, so a plan for spreading is no more than a beginning. ${help}`,
    )
  }
  const { share = 0 } = plans[0]!.devices[0]!
  const after = `Spread over two devices the more loaded one would stand at ${share.toFixed(2)}${rest > 0 ? `, at ${(share + rest / ratedMa).toFixed(2)} if the ${current(rest)} mA that no circuit accounts for came on top of it` : ''}.`
  return words(
    now,
    need,
    after,
    base.unjudged.length > 0 ? `Some circuits have no figure and are in no plan. ${help}` : '',
  )
}

function words(...sentences: readonly string[]): string {
  return sentences.filter((text) => text !== '').join(' ')
}

function tooFew(timeline: Timeline, judged: number): string {
  if (timeline.rcd.circuits.length < 2) return 'There is only one circuit on this device: nothing to spread.'
  const have = judged === 0 ? 'No circuit has' : 'Only one circuit has'
  return `${have} a figure yet, so nothing can be spread. A survey would help most: the clamp on the tails, everything on, then each circuit off for a minute in turn.`
}
