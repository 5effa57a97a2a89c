import { draws } from '../draws.ts'
import type { Installation, LoadPlan } from '../installation.ts'
import type { Plan } from '../simulate.ts'
import type { Simulated } from '../simulated.ts'
import { drawFault, neededMa, pickCulprit } from './culprit.ts'
import { drawGround, type Ground, withLoad, withRcd, withStanding } from './ground.ts'
import { tuned } from './tune.ts'

const HOUR = 3_600_000
const DAY = 24 * HOUR

/** An outdoor circuit suffers in rain, hours later. */
export function rainLag(seed: number): Simulated {
  const ground = withWeather(drawGround(seed, { days: 21, spellsPerWeek: 5 }))
  return tuned(rainPlans(ground, seed, 'rain-lag'), 5, 14)
}

/** A load leaks when on, and rain does harm too. */
export function twoCauses(seed: number): Simulated {
  const random = draws(seed, 'two-causes')
  const ground = withWeather(drawGround(seed, { days: 21, spellsPerWeek: 4 }))
  const { load, circuit } = pickCulprit(ground, random)
  const culprit = `load:${load.ref}`
  const needed = neededMa(ground)
  const rain = rainPlans(ground, seed, 'two-causes')
  const planAt = (strength: number): Plan => {
    const plan = rain(strength)
    const bad: LoadPlan = { ...load, monitored: true, fault: drawFault('when-on', strength * needed, seed) }
    return {
      ...plan,
      installation: withLoad(plan.installation, bad, circuit),
      truth: { rcd: 'A', kind: 'two-causes', causes: [culprit, 'rain'], answers: [culprit, 'rain'] },
    }
  }
  return tuned(planAt, 9, 18)
}

function rainPlans(ground: Ground, seed: number, kind: string): (strength: number) => Plan {
  const random = draws(seed, 'damp')
  const needed = neededMa(ground)
  const damping = {
    lagHours: random.between(0.5, 5),
    decayHours: random.between(3, 14),
    soakMm: random.between(2, 7),
  }
  const place = random.integer(ground.installation.rcds[0]!.circuits.length)
  return (strength) => ({
    ...ground,
    installation: withRcd(ground.installation, (rcd) => ({
      ...rcd,
      circuits: rcd.circuits.map((circuit, c) =>
        c === place ? { ...circuit, damp: { ...damping, mA: 1.3 * strength * needed } } : circuit,
      ),
    })),
    truth: { rcd: 'A', kind, causes: ['rain'], answers: ['rain'] },
  })
}

/** Neutral touches earth: the residual follows the load current of the whole group. */
export function neutralEarth(seed: number): Simulated {
  const drawn = drawGround(seed, { days: 14, loads: [8, 12] })
  const ground = alikeInCurrent(
    drawn.logger ? { ...drawn, logger: { ...drawn.logger, loadCurrent: true } } : drawn,
    seed,
  )
  const needed = neededMa(ground)
  return tuned(
    (strength) => ({
      ...ground,
      installation: withRcd(ground.installation, (rcd) => ({ ...rcd, neutralEarth: (strength * needed) / 25 })),
      truth: { rcd: 'A', kind: 'neutral-earth', causes: ['load-current'], answers: ['load-current'] },
    }),
    5,
    14,
  )
}

/** The ground with loads of 3 to 8 A: heavy load of the group is several of them, not one. */
function alikeInCurrent(ground: Ground, seed: number): Ground {
  const random = draws(seed, 'alike')
  return {
    ...ground,
    installation: withRcd(ground.installation, (rcd) => ({
      ...rcd,
      circuits: rcd.circuits.map((circuit) => ({
        ...circuit,
        loads: circuit.loads.map((load) => ({ ...load, amps: random.between(3, 8) })),
      })),
    })),
  }
}

/** Nothing is broken: many small leakages together now and then reach the trip current. */
export function standing(seed: number): Simulated {
  const ground = evened(drawGround(seed, { days: 14, loads: [9, 13], reach: [0.97, 1] }), seed)
  return tuned(
    (strength) => ({
      ...ground,
      installation: withStanding(ground.installation, strength),
      truth: { rcd: 'A', kind: 'standing', causes: ['standing'], answers: ['standing'] },
    }),
    5,
    14,
  )
}

/** The ground with loads that leak much alike: 0.4 to 1 mA while on, so that none of them stands out. */
function evened(ground: Ground, seed: number): Ground {
  const random = draws(seed, 'evened')
  return {
    ...ground,
    installation: withRcd(ground.installation, (rcd) => ({
      ...rcd,
      drift: { ...rcd.drift, mA: random.between(0.4, 0.8) },
      circuits: rcd.circuits.map((circuit) => ({
        ...circuit,
        loads: circuit.loads.map((load) => ({
          ...load,
          on: { g: 0.1, b: random.between(0.4, 1) },
          idle: { g: 0, b: 0.1 },
        })),
      })),
    })),
  }
}

/** The electrician switches one circuit after the other off, each for a while; nothing says which loads run. */
export function isolationInTurn(seed: number): Simulated {
  return circuitScenario(seed, 'isolation-in-turn', (ground) => ground.logger)
}

/** No logger at all: switchings and trips as people wrote them down. */
export function diaryOnly(seed: number): Simulated {
  return circuitScenario(seed, 'diary-only', () => null)
}

function circuitScenario(seed: number, kind: string, logger: (ground: Ground) => Plan['logger']): Simulated {
  const random = draws(seed, kind)
  const drawn = drawGround(seed, { days: 21, idleSwitching: 0 })
  const ground: Ground = { ...drawn, installation: unwatched(drawn.installation), logger: logger(drawn) }
  const { load, circuit } = pickCulprit(ground, random)
  const place = ground.installation.rcds[0]!.circuits[circuit]!
  const cause = `circuit:${place.ref}`
  const needed = neededMa(ground)
  // A load that is alone on its circuit is the same suspect.
  const answers = place.loads.length === 1 ? [cause, `load:${load.ref}`] : [cause]
  const isolating = inTurn(ground)
  const planAt = (strength: number): Plan => ({
    ...ground,
    installation: {
      ...withLoad(
        ground.installation,
        { ...load, monitored: false, fault: drawFault('when-on', strength * needed, seed) },
        circuit,
      ),
      isolating,
    },
    people: { ...ground.people, suspects: [] },
    truth: { rcd: 'A', kind, causes: [cause], answers },
  })
  return tuned(planAt, 20, 40)
}

function unwatched(installation: Installation): Installation {
  return withRcd(installation, (rcd) => ({
    ...rcd,
    circuits: rcd.circuits.map((circuit) => ({
      ...circuit,
      loads: circuit.loads.map((load) => ({ ...load, monitored: false })),
    })),
  }))
}

/** Each circuit off once, one after the other, as long as the span allows, with half a day between. */
function inTurn(ground: Ground): Installation['isolating'] {
  const { circuits } = ground.installation.rcds[0]!
  const first = ground.from + 2 * DAY
  const each = (ground.to - first) / circuits.length
  return circuits.map((circuit, i) => {
    const from = first + i * each
    return { of: `circuit:${circuit.ref}`, from, to: from + each - 12 * HOUR, told: true }
  })
}

function withWeather(ground: Ground): Ground {
  return ground.logger ? { ...ground, logger: { ...ground.logger, weather: true } } : ground
}
