import { localClock } from '../../timeline/local-clock.ts'
import { eachSpan, spansOf } from '../../timeline/spans.ts'
import { type Draws, draws } from '../draws.ts'
import { runsOf } from '../habit.ts'
import type { LoadFault, LoadPlan, Logger } from '../installation.ts'
import type { Plan } from '../simulate.ts'
import type { Simulated } from '../simulated.ts'
import { drawFault, neededMa, pickCulprit } from './culprit.ts'
import { drawGround, type Ground, type GroundWish, withLoad } from './ground.ts'
import { tuned } from './tune.ts'

const MINUTE = 60_000
const HOUR = 60 * MINUTE

interface LoadKind {
  readonly kind: string
  readonly fault: LoadFault['kind']
  readonly wish?: Partial<GroundWish>
  readonly trips?: readonly [number, number]
  readonly logger?: (logger: Logger, ground: Ground, random: Draws) => Logger
  /** What of the culprit is changed; by default it is listed and monitored. */
  readonly culprit?: Partial<LoadPlan>
}

/** A known load leaks in one way or another; its runs are on record unless the kind says otherwise. */
function loadScenario(seed: number, wanted: LoadKind): Simulated {
  const random = draws(seed, wanted.kind)
  const drawn = drawGround(seed, { days: 7 + random.integer(15), ...wanted.wish })
  const ground =
    wanted.logger && drawn.logger ? { ...drawn, logger: wanted.logger(drawn.logger, drawn, random) } : drawn
  const { load, circuit } = pickCulprit(ground, random)
  const needed = neededMa(ground)
  const [least, most] = wanted.trips ?? [5, 14]
  const culprit = `load:${load.ref}`
  const place = `circuit:${ground.installation.rcds[0]!.circuits[circuit]!.ref}`
  const answers = wanted.culprit?.listed === false ? ['unlisted', 'none', place] : [culprit]
  const planAt = (strength: number): Plan => {
    const fault = drawFault(wanted.fault, strength * needed, seed)
    const bad = { ...load, monitored: true, ...wanted.culprit, fault }
    return {
      ...ground,
      installation: withLoad(ground.installation, bad, circuit),
      people: { ...ground.people, suspects: ground.people.suspects.filter((of) => of !== culprit) },
      truth: { rcd: 'A', kind: wanted.kind, causes: [culprit], answers },
    }
  }
  return tuned(planAt, least, most)
}

/** A load leaks the whole time that it is on. */
export function loadWhenOn(seed: number): Simulated {
  return loadScenario(seed, { kind: 'load-when-on', fault: 'when-on' })
}

/** A load leaks for seconds at random moments of its runs: the log may show nothing. */
export function loadAtRandomInRun(seed: number): Simulated {
  return loadScenario(seed, { kind: 'load-at-random-in-run', fault: 'in-run' })
}

/** A load leaks in the first minutes of a run, while it warms. */
export function loadWhileWarming(seed: number): Simulated {
  return loadScenario(seed, { kind: 'load-while-warming', fault: 'warming' })
}

/** A load leaks when on, and only three trips are known. */
export function threeTrips(seed: number): Simulated {
  return loadScenario(seed, { kind: 'three-trips', fault: 'when-on', trips: [3, 3] })
}

/** A load leaks when on; the logger reads once a minute, states too, and was away for some hours, several times. */
export function slowLoggerWithGaps(seed: number): Simulated {
  return loadScenario(seed, {
    kind: 'slow-logger-with-gaps',
    fault: 'when-on',
    wish: { intervalMs: 60_000 },
    logger: (logger, ground, random) => ({
      ...logger,
      statesOnChange: false,
      gaps: Array.from({ length: 2 + random.integer(3) }, () => {
        const start = ground.from + random.uniform() * (ground.to - ground.from)
        return [start, start + random.between(3, 30) * HOUR] as const
      }),
    }),
  })
}

/** A load leaks when on; the logger's clock is minutes wrong and drifts, people's watches are right. */
export function wrongClockLogger(seed: number): Simulated {
  return loadScenario(seed, {
    kind: 'wrong-clock-logger',
    fault: 'when-on',
    logger: (logger, _ground, random) => ({
      ...logger,
      clockMs: Math.round((random.chance(0.5) ? 1 : -1) * random.between(2, 9) * MINUTE),
      clockMsPerDay: Math.round(random.between(-8_000, 8_000)),
    }),
  })
}

/** The load that leaks stands on no sheet; its circuit may be named for it. */
export function unmonitored(seed: number): Simulated {
  return loadScenario(seed, {
    kind: 'unmonitored',
    fault: 'when-on',
    culprit: { listed: false, monitored: false },
  })
}

/** A sound load runs mostly when the leaking one does. */
export function decoySameHabit(seed: number): Simulated {
  const random = draws(seed, 'decoy')
  const ground = drawGround(seed, { days: 10 + random.integer(12) })
  const { load, circuit } = pickCulprit(ground, random)
  const clock = localClock(ground.installation.timeZone)
  const setting = { from: ground.from, to: ground.to, clock, latitude: 0, longitude: 0 }
  const spans = runsOf(load.habit, setting, draws(seed, 'shared habit'))
  const beside: [number, number][] = []
  for (const span of eachSpan(spans)) {
    const move = (): number => random.normal(0, 4) * MINUTE
    if (random.chance(0.7)) beside.push([span.from + move(), span.to + move()])
    // It also runs without the other, about the same hour.
    if (random.chance(0.35)) beside.push([span.to + 20 * MINUTE, span.to + 20 * MINUTE + (span.to - span.from)])
  }
  const decoy: LoadPlan = {
    ...load,
    ref: 'decoy',
    habit: { kind: 'given', spans: spansOf(beside.filter(([a, b]) => b > a)) },
    monitored: true,
  }
  const needed = neededMa(ground)
  const planAt = (strength: number): Plan => {
    const fault = drawFault('when-on', strength * needed, seed)
    const bad: LoadPlan = { ...load, habit: { kind: 'given', spans }, monitored: true, fault }
    const installation = withLoad(withLoad(ground.installation, bad, circuit), decoy, circuit + 1)
    return {
      ...ground,
      installation,
      people: { ...ground.people, suspects: ['load:decoy'] },
      truth: { rcd: 'A', kind: 'decoy-same-habit', causes: [`load:${load.ref}`], answers: [`load:${load.ref}`] },
    }
  }
  return tuned(planAt, 6, 14)
}
