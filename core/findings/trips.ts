import type { BudgetLine, Headroom, TripFinding } from '../contract/findings.ts'
import { writeInstant } from '../contract/primitives.ts'
import type { Timeline, TimelineTrip } from '../timeline/timeline.ts'
import { type TripFact, tripFacts } from './trip-facts.ts'
import { sharesAt } from './trip-shares.ts'
import { isClimb, type Trigger, triggerOf } from './trip-trigger.ts'
import { duration, figure, nameOf, rounded, sentence } from './words.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 3_600_000

/** Every trip of the device dissected, in order of time (methods.md §4): level, course, trigger, shares, and all in words. */
export function tripFindings(timeline: Timeline, lines: readonly BudgetLine[], headroom: Headroom): TripFinding[] {
  return tripFacts(timeline).map((fact) => {
    const trip = timeline.trips[fact.index]!
    const trigger = triggerOf(timeline, fact, lines)
    const isInstant = trip.from === trip.to
    return {
      id: trip.id,
      at: isInstant ? writeInstant(trip.from) : null,
      after: isInstant ? null : writeInstant(trip.from),
      before: isInstant ? null : writeInstant(trip.to),
      levelMa: fact.levelMa === null ? null : rounded(fact.levelMa),
      usualMa: fact.usualMa === null ? null : rounded(fact.usualMa),
      course: fact.course,
      trigger: trigger?.thing.of ?? null,
      // An interval of hours has no one state to share the level out by.
      shares: trip.to - trip.from > HOUR_MS / 6 ? [] : sharesAt(timeline, trip.from, lines),
      text: textOf(timeline, fact, trigger, headroom),
    }
  })
}

function textOf(timeline: Timeline, fact: TripFact, trigger: Trigger | null, headroom: Headroom): string {
  const parts = [
    originText(timeline.trips[fact.index]!),
    levelText(fact, headroom),
    courseText(timeline, fact),
    triggerText(timeline, trigger),
  ]
  return sentence(`${parts.filter((part) => part !== '').join('; ')}.`)
}

/** Where the trip and its time come from, when not from whoever wrote it down. */
function originText(trip: TimelineTrip): string {
  if (trip.id === null) return 'nobody wrote this trip down: the log falls to nothing and comes back'
  if (!trip.narrowed) return ''
  return trip.from === trip.to ? 'found later; the log shows when it came' : 'found later; the log narrows when it came'
}

function levelText(fact: TripFact, headroom: Headroom): string {
  if (fact.levelMa === null || fact.usualMa === null) return ''
  const { value, low } = headroom.tripMa
  const left = low - fact.levelMa
  const room = left > 0 ? `, ${figure(value - fact.levelMa)} below the trip current` : ''
  return `${figure(fact.levelMa)} mA before${room}, ${figure(fact.usualMa)} mA usual`
}

function courseText(timeline: Timeline, fact: TripFact): string {
  switch (fact.course) {
    case 'shared':
      return sharedText(timeline, fact.sharedWith)
    case 'unseen':
      return unseenText(timeline, fact)
    case 'step':
      if (isClimb(fact)) {
        return `climb of ${figure(fact.riseMa ?? 0)} mA over the last ${ago(timeline.trips[fact.index]!.from - (fact.roseFrom ?? 0))}`
      }
      return `step of ${figure(fact.riseMa ?? 0)} mA ${ago(timeline.trips[fact.index]!.from - (fact.roseAt ?? 0))} before`
    case 'creep':
      return `the level had crept up${fact.slopeMaPerMin !== null && fact.slopeMaPerMin >= 0.01 ? ` by ${figure(fact.slopeMaPerMin)} mA a minute` : ''}`
    case 'sudden':
      return 'no warning in the log'
    default:
      return fact.course satisfies never
  }
}

function sharedText(timeline: Timeline, sharedWith: readonly string[]): string {
  const devices = sharedWith
    .filter((name) => name !== 'supply')
    .map((ref) => timeline.sheet.rcds.find((rcd) => rcd.ref === ref)?.label ?? ref)
  const voltage = sharedWith.includes('supply') ? 'the voltage left its band just before' : ''
  const others =
    devices.length === 0
      ? ''
      : `${devices.length === 1 ? 'device' : 'devices'} ${devices.join(', ')} opened at the same time`
  return [others, voltage].filter((text) => text !== '').join(' and ')
}

function unseenText(timeline: Timeline, fact: TripFact): string {
  const trip = timeline.trips[fact.index]!
  if (timeline.leakage === null) return 'no leakage is logged on this device'
  if (trip.from !== trip.to) {
    return `somewhere in ${duration((trip.to - trip.from) / HOUR_MS)}, so nothing can be said of the moments before; it counts spread over that time`
  }
  return 'no reading near enough to the trip'
}

function triggerText(timeline: Timeline, trigger: Trigger | null): string {
  if (trigger === null) return ''
  const { thing, change, agoMs } = trigger
  return `${nameOf(timeline, thing.of)} had ${change.on ? 'come on' : 'gone off'} ${agoMs < 1_000 ? 'at that moment' : `${ago(agoMs)} earlier`}`
}

function ago(ms: number): string {
  const seconds = Math.max(0, ms) / 1_000
  if (seconds < 90) return `${Math.max(1, Math.round(seconds))} s`
  return ms < 90 * MINUTE_MS ? `${Math.round(ms / MINUTE_MS)} min` : duration(ms / HOUR_MS)
}
