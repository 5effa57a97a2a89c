import type { Trip } from '../contract/records.ts'
import type { LocalClock } from '../timeline/local-clock.ts'
import type { Draws } from './draws.ts'
import { nextLocal } from './habit.ts'
import type { People } from './installation.ts'

const MINUTE = 60_000

/** What those on site do about a trip. */
export interface Keeper {
  /** When they close the device again; `streak` counts trips right after closing. */
  restoredAt(tripAt: number, streak: number): number
  /** What they write down, given when the device was last closed and what was running. */
  note(rcd: string, tripAt: number, restoredAt: number, lastClosed: number, running: readonly string[]): Trip
}

/** Makes the keeper of a site: by day somebody closes the device after minutes, by night in the morning. */
export function keeperOf(people: People, clock: LocalClock, random: Draws): Keeper {
  const awake = (t: number): boolean => {
    const minute = clock.minuteOfDay(t)
    return minute >= people.up && minute < people.down
  }
  return {
    restoredAt(tripAt, streak) {
      if (!awake(tripAt)) return Math.round(nextLocal(tripAt, people.up, clock) + random.between(0, 25) * MINUTE)
      const wait = (2 + random.exponential(people.resetMinutes)) * (1 + 2 * streak)
      const end = tripAt + wait * MINUTE
      return Math.round(awake(end) ? end : nextLocal(end, people.up, clock) + random.between(0, 25) * MINUTE)
    },
    note(rcd, tripAt, restoredAt, lastClosed, running) {
      const noticed = random.chance(people.noticed)
      const late = Math.abs(random.normal(0, people.lateSeconds)) * 1_000
      const unseen = random.between(5, 120) * MINUTE
      const told = running.filter((of) => people.suspects.includes(of))
      const rest = {
        restoredAt,
        ...(told.length > 0 ? { running: told, ...(people.saying ? { note: people.saying } : {}) } : {}),
      }
      if (awake(tripAt) && noticed) return { rcd, at: Math.round(Math.min(tripAt + late, restoredAt)), ...rest }
      const bedtime = nextLocal(tripAt, people.down, clock) - 1440 * MINUTE
      const seenOn = awake(tripAt) ? tripAt - unseen : bedtime
      const before = Math.max(tripAt + 1, restoredAt - MINUTE)
      return {
        rcd,
        after: Math.round(Math.max(lastClosed, Math.min(seenOn, tripAt - 1))),
        before: Math.round(before),
        restoredAt,
      }
    },
  }
}
