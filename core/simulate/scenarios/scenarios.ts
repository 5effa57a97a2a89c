import type { Simulated } from '../simulated.ts'
import { nothing, sharedSurge, tooSensitive } from './kinds-of-device.ts'
import {
  decoySameHabit,
  loadAtRandomInRun,
  loadWhenOn,
  loadWhileWarming,
  slowLoggerWithGaps,
  threeTrips,
  unmonitored,
  wrongClockLogger,
} from './kinds-of-loads.ts'
import { diaryOnly, isolationInTurn, neutralEarth, rainLag, standing, twoCauses } from './kinds-of-place.ts'
import { dusk, fixedClock, fixedPeriod } from './kinds-of-time.ts'

/** Every kind of scenario, by name: the same seed gives the same site, to the bit. */
export const SCENARIOS: Readonly<Record<string, (seed: number) => Simulated>> = {
  'load-when-on': loadWhenOn,
  'load-at-random-in-run': loadAtRandomInRun,
  'load-while-warming': loadWhileWarming,
  'rain-lag': rainLag,
  'fixed-clock': fixedClock,
  'fixed-period': fixedPeriod,
  dusk,
  'neutral-earth': neutralEarth,
  standing,
  'two-causes': twoCauses,
  'decoy-same-habit': decoySameHabit,
  'diary-only': diaryOnly,
  'isolation-in-turn': isolationInTurn,
  'too-sensitive': tooSensitive,
  nothing,
  'shared-surge': sharedSurge,
  'three-trips': threeTrips,
  'slow-logger-with-gaps': slowLoggerWithGaps,
  'wrong-clock-logger': wrongClockLogger,
  unmonitored,
}
