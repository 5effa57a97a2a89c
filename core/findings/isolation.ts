import type { NextStep, Suspect } from '../contract/findings.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import { countOf, duration, figure, nameOf } from './words.ts'

/** Odds with which a question shall be settled. */
const SETTLED = 0.9
/** From this probability on a suspect leads. */
const LEADS = 0.6
/** Longest isolation that is proposed, days; beyond it other ways are better. */
const LONGEST_DAYS = 28

/**
 * What to isolate next and for how long. While a guilty circuit or load is isolated the device stays quiet but for
 * the unexplained trips; an innocent one would let a trip come with probability 1 − exp(−rate × time). The time is
 * that after which a quiet spell leaves one chance in ten of innocence. Ordered by what an isolation can settle per
 * day: its uncertainty over its length. At most three, then what else helps.
 */
export function nextSteps(timeline: Timeline, hours: number, suspects: readonly Suspect[]): NextStep[] {
  const trips = timeline.trips.length
  if (trips === 0 || hours <= 0) {
    return [
      { isolate: null, days: 0, settles: 0, text: 'Leave the logger on site until at least three trips were caught.' },
    ]
  }
  const rate = trips / hours
  const days = -Math.log(1 - SETTLED) / rate / 24
  const whole = Math.max(1, Math.ceil(days))
  const steps: NextStep[] = []
  const leading = suspects[0]
  // what no switch isolates comes first when it leads: rain, a timer, the device itself
  if (leading !== undefined && leading.probability >= LEADS && !/^(load:|circuit:|none$)/.test(leading.of)) {
    steps.push({ isolate: null, days: 0, settles: 0, text: leading.next })
  }
  const things = suspects
    .filter((s) => s.of.startsWith('load:') || s.of.startsWith('circuit:'))
    .map((s) => ({ s, doubt: entropy(s.probability) }))
    .filter(({ s }) => s.grade !== 'cleared')
    .sort((a, b) => b.doubt - a.doubt || (a.s.of < b.s.of ? -1 : 1))
  for (const { s } of things.slice(0, 3)) {
    const thing = timeline.things.find((t) => t.of === s.of)
    if (thing === undefined || whole > LONGEST_DAYS) continue
    const quiet = 1 - Math.exp(-rate * whole * 24)
    steps.push({
      isolate: s.of,
      days: whole,
      settles: Number(quiet.toFixed(3)),
      text: `${how(thing, nameOf(timeline, s.of))} for ${countOf(whole, 'day')}: at ${figure(rate * 24 * 7)} trips a week a quiet spell of that length would come by chance once in ${figure(1 / (1 - quiet))} times.`,
    })
  }
  if (steps.length === 0) {
    steps.push({
      isolate: null,
      days: whole,
      settles: 0,
      text: `Leave the logger for ${duration(whole * 24)} more: that catches at least one more trip with 90 % odds.`,
    })
  }
  if (!timeline.tests.some((t) => t.kind === 'ramp') && timeline.rcd.rampTripMa === undefined) {
    steps.push({
      isolate: null,
      days: 0,
      settles: 0,
      text: 'Do a ramp test of the device: it replaces the guess of its trip current by a figure and shows whether the device itself is too sensitive.',
    })
  }
  return steps
}

function how(thing: Thing, name: string): string {
  if (thing.kind === 'load') return `Unplug ${name} (or open both its poles)`
  return thing.isolation === 'two-pole'
    ? `Switch off ${name}`
    : `Isolate ${name} in both poles (its breaker opens the line only; what leaks from the neutral would stay)`
}

/** Entropy of a yes-or-no question, bits. */
function entropy(p: number): number {
  return p <= 0 || p >= 1 ? 0 : -(p * Math.log2(p) + (1 - p) * Math.log2(1 - p))
}
