import { draws } from '../draws.ts'
import { simulate } from '../simulate.ts'
import type { Simulated } from '../simulated.ts'
import { drawGround, withRcd, withStanding } from './ground.ts'
import { tuned } from './tune.ts'

/** The device itself opens far below half its rating; the leakage is as sound as anywhere. */
export function tooSensitive(seed: number): Simulated {
  const ground = drawGround(seed, { days: 14, tripShare: [0.22, 0.42], reach: [0.97, 1] })
  return tuned(
    (strength) => ({
      ...ground,
      installation: withStanding(ground.installation, strength),
      truth: { rcd: 'A', kind: 'too-sensitive', causes: ['device'], answers: ['device'] },
    }),
    5,
    14,
  )
}

/** Transients open the device at random; nothing on site has to do with it. */
export function nothing(seed: number): Simulated {
  const random = draws(seed, 'nothing')
  const ground = drawGround(seed, { days: 14 + random.integer(8) })
  const surgesPerWeek = random.between(2, 6)
  return simulate({
    ...ground,
    installation: withRcd(ground.installation, (rcd) => ({ ...rcd, surgesPerWeek })),
    truth: { rcd: 'A', kind: 'nothing', causes: ['none'], answers: ['none'] },
  })
}

/** Transients from the supply open two devices at once. */
export function sharedSurge(seed: number): Simulated {
  const random = draws(seed, 'shared-surge')
  const ground = drawGround(seed, { days: 14 + random.integer(8) })
  const [first] = ground.installation.rcds
  const neighbour = {
    ...first!,
    ref: 'B',
    tripMa: 30 * random.between(0.65, 0.9),
    circuits: [
      { ref: 'b1', isolation: 'single-pole' as const, standing: { g: 0.1, b: 4 }, neutralShare: 0.1, loads: [] },
    ],
  }
  return simulate({
    ...ground,
    installation: {
      ...ground.installation,
      rcds: [first!, neighbour],
      sharedSurgesPerWeek: random.between(2, 5),
    },
    truth: { rcd: 'A', kind: 'shared-surge', causes: ['supply'], answers: ['supply'] },
  })
}
