import type { NextStep, Suspect } from '../../contract/findings.ts'
import type { GammaBelief } from '../../statistics/gamma-poisson.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { countOf } from '../words.ts'
import { stayFor } from './stay.ts'

/** Trips that must come, or stay away, before a test that isolates nothing tells. */
const TRIPS = 3

/**
 * What settles the question of a suspect that no switch takes away: rain, a timer, the device, the supply, standing leakage, load
 * current. `spread` says what spreading the circuits would do. Says how many days three more trips take, where only they can tell.
 */
export function ownTest(timeline: Timeline, suspect: Suspect, belief: GammaBelief, spread: string | null): NextStep {
  const days = Math.ceil(stayFor(belief, TRIPS) / 24)
  const wait =
    Number.isFinite(days) && days <= 60
      ? ` Three more trips, which would tell more, take about ${countOf(days, 'day')}.`
      : ''
  return { isolate: null, days: 0, settles: 0, text: `${textOf(timeline, suspect, spread)}${wait}` }
}

function textOf(timeline: Timeline, suspect: Suspect, spread: string | null): string {
  const at = suspect.localTime === undefined ? 'at that time' : `at ${suspect.localTime}`
  switch (suspect.of) {
    case 'clock':
      return `Stand at the board ${at} with a clamp and switch the circuits off one by one: the step of the leakage goes with the circuit that feeds the timer. ${suspect.next}`
    case 'period': {
      const every = suspect.hours === undefined ? 'its cycle' : `its cycle of ${suspect.hours} hours`
      return `Clamp circuit by circuit over one of ${every}: the circuit on which the leakage steps up feeds it. ${suspect.next}`
    }
    case 'sun':
      return `Be there at dusk with a clamp, cover and uncover the photocell, and see which circuit steps. ${suspect.next}`
    case 'rain':
      return `${suspect.next} Dry trips in the meantime speak against rain; wet days without a trip count as well.${timeline.rain === null ? ' Log the rain.' : ''}`
    case 'load-current':
      return `${suspect.next} It stays quiet only when both poles of the faulty circuit are open.`
    case 'standing':
      return `${suspect.next}${spread === null ? '' : ` ${spread}`} When the level then stays low and the trips stop, it was the sum and no single fault.`
    case 'supply':
      return `Log the voltage on this device and write the trips of the other devices down to the minute: several at once settle it. ${suspect.next}`
    case 'device':
      return `${suspect.next} It needs no waiting.`
    default:
      return suspect.next
  }
}
