import { draws } from '../draws.ts'
import type { Habit } from '../habit.ts'
import type { LoadFault, LoadPlan } from '../installation.ts'
import type { Simulated } from '../simulated.ts'
import { neededMa } from './culprit.ts'
import { drawGround, withLoad } from './ground.ts'
import { tuned } from './tune.ts'

interface TimeKind {
  readonly kind: string
  readonly days: number
  readonly habit: Habit
  readonly fault: (mA: number) => LoadFault
  readonly listed: boolean
  readonly causes: readonly string[]
  readonly answers: readonly string[]
  readonly trips: readonly [number, number]
}

/** A load that nobody switches by hand leaks; no channel says when it runs. */
function timeScenario(seed: number, wanted: TimeKind): Simulated {
  const random = draws(seed, `${wanted.kind} load`)
  const ground = drawGround(seed, { days: wanted.days })
  const needed = neededMa(ground)
  const circuit = random.integer(ground.installation.rcds[0]!.circuits.length)
  const place = `circuit:${ground.installation.rcds[0]!.circuits[circuit]!.ref}`
  const amps = random.between(0.5, 6)
  const on = { g: random.between(0.05, 0.3), b: random.between(0.05, 0.6) }
  return tuned(
    (strength) => {
      const load: LoadPlan = {
        ref: 'timed',
        habit: wanted.habit,
        amps,
        on,
        idle: { g: 0, b: 0 },
        resumes: true,
        listed: wanted.listed,
        monitored: false,
        fault: wanted.fault(strength * needed),
      }
      return {
        ...ground,
        installation: withLoad(ground.installation, load, circuit),
        truth: { rcd: 'A', kind: wanted.kind, causes: wanted.causes, answers: [...wanted.answers, place] },
      }
    },
    ...wanted.trips,
  )
}

/** A time switch that stands on no sheet starts a leaking load once or twice a day. */
export function fixedClock(seed: number): Simulated {
  const random = draws(seed, 'fixed-clock')
  const starts = random.shuffle(Array.from({ length: 94 }, (_, i) => 15 * i)).slice(0, 1 + random.integer(2))
  const length = random.between(15, 70)
  return timeScenario(seed, {
    kind: 'fixed-clock',
    days: 12 + random.integer(10),
    habit: { kind: 'clock', windows: starts.map((m) => [m, Math.min(1440, m + length)] as const), jitter: 0.3 },
    fault: (mA) => ({ kind: 'when-on', mA, spread: random.between(0.1, 0.2) }),
    listed: false,
    causes: ['clock'],
    answers: ['clock', 'unlisted'],
    trips: [6, 12],
  })
}

/** A timer of its own starts a leaking load every so many hours; the hours do not divide the day. */
export function fixedPeriod(seed: number): Simulated {
  const random = draws(seed, 'fixed-period')
  const hours = random.pick([5.3, 6.7, 7.4, 9.1, 10.6, 13.3, 17.5])
  return timeScenario(seed, {
    kind: 'fixed-period',
    days: 12 + random.integer(10),
    habit: { kind: 'every', hours, minutes: random.between(15, 40), jitter: 1, first: random.between(0, hours) },
    fault: (mA) => ({ kind: 'when-on', mA, spread: 0.15 }),
    listed: false,
    causes: ['period'],
    answers: ['period', 'unlisted'],
    trips: [7, 16],
  })
}

/** Lights on a photocell leak in their first minutes of warmth, six weeks long, so that dusk and clock part. */
export function dusk(seed: number): Simulated {
  const random = draws(seed, 'dusk')
  const listed = random.chance(0.5)
  const degrees = random.between(-5, -1)
  const riseMinutes = random.between(0.5, 2)
  const dryMinutes = random.between(10, 30)
  return timeScenario(seed, {
    kind: 'dusk',
    days: 42,
    habit: { kind: 'dusk', degrees },
    fault: (mA) => ({ kind: 'warming', mA: 1.3 * mA, spread: 0.15, riseMinutes, dryMinutes, dampHours: 5 }),
    listed,
    causes: ['sun'],
    answers: listed ? ['sun', 'load:timed'] : ['sun', 'unlisted'],
    trips: [10, 24],
  })
}
