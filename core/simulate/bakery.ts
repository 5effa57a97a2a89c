import { localClock } from '../timeline/local-clock.ts'
import { bakeryTests, bakeryWeather } from './bakery-records.ts'
import type { CircuitPlan, Installation, LoadPlan, Logger, People } from './installation.ts'
import { simulate } from './simulate.ts'
import type { Simulated } from './simulated.ts'

const HOUR = 3_600_000
const DAY = 24 * HOUR

/** The seed of the recorded week; every number of it follows. */
const SEED = 61
const TIME_ZONE = 'Europe/Vienna'

/** Hours of the day at which a bakehouse works: from two in the morning to noon. */
const BAKING = [1, 2, 9, 10, 10, 10, 9, 7, 6, 5, 4, 3, 2, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0]
const SHOP = [0, 0, 0, 0, 0, 2, 6, 9, 9, 8, 7, 7, 7, 6, 6, 7, 8, 6, 1, 0, 0, 0, 0, 0]

/** A load that is listed, monitored and comes back by itself. */
function load(plan: Omit<LoadPlan, 'listed' | 'monitored' | 'resumes'> & Partial<LoadPlan>): LoadPlan {
  return { listed: true, monitored: true, resumes: true, ...plan }
}

/**
 * One week of a village bakery, from the local midnight at or before `startMs` on; but for summer time always the same. Device A
 * feeds the bakehouse and opens at about 23 mA: proving cabinet and deck ovens with large filters, the mixer, and the walk-in freezer whose defrost
 * heater leaks as it warms, every eight hours or so: the cause. Device B feeds the shop: sign lights on a photocell and an outdoor
 * socket that suffers in rain. The baker is sure that it is the mixer.
 */
export function bakeryWeek(startMs: number): Simulated {
  const clock = localClock(TIME_ZONE)
  const from = clock.day(clock.dayNumber(startMs)).from
  const to = from + 7 * DAY
  const installation: Installation = {
    name: 'Village bakery',
    timeZone: TIME_ZONE,
    latitude: 47.3,
    longitude: 13.4,
    weather: bakeryWeather(from),
    sharedSurgesPerWeek: 0,
    rcds: [
      {
        ref: 'A',
        label: 'Bakehouse and cold room',
        ratedMa: 30,
        tripMa: 23.1,
        circuits: bakehouse(),
        drift: { mA: 0.35, hours: 9 },
        flickerMa: 0.09,
        surgesPerWeek: 0,
      },
      {
        ref: 'B',
        label: 'Shop and outside',
        ratedMa: 30,
        tripMa: 24.6,
        circuits: shop(),
        drift: { mA: 0.15, hours: 12 },
        flickerMa: 0.06,
        surgesPerWeek: 0,
      },
    ],
    // Thursday nine to Friday nine: the electrician's first guess.
    isolating: [{ of: 'circuit:4', from: from + 3 * DAY + 9 * HOUR, to: from + 4 * DAY + 9 * HOUR, told: true }],
  }
  return simulate({
    installation,
    people: PEOPLE,
    logger: loggerFrom(from),
    from,
    to,
    seed: SEED,
    rampTripMa: { A: 23.1 },
    tests: bakeryTests(from),
    truth: { rcd: 'A', kind: 'bakery', causes: ['load:defrost'], answers: ['load:defrost'] },
  })
}

const PEOPLE: People = {
  up: 2 * 60,
  down: 20 * 60,
  resetMinutes: 9,
  noticed: 0.8,
  lateSeconds: 40,
  suspects: ['load:mixer'],
  saying: 'Mixer was on again',
}

function loggerFrom(startMs: number): Logger {
  return {
    intervalMs: 1_000,
    intervalOf: { B: 10_000 },
    resolutionMa: 0.01,
    accuracy: { percent: 2, digits: 5 },
    fullScaleMa: 300,
    // Its battery was changed on Wednesday afternoon.
    gaps: [[startMs + 2 * DAY + 14 * HOUR, startMs + 2 * DAY + 16.5 * HOUR]],
    clockMs: 0,
    clockMsPerDay: 0,
    statesMs: 10_000,
    statesOnChange: true,
    loadCurrent: true,
    weather: true,
  }
}

function bakehouse(): CircuitPlan[] {
  const runs = (perDay: number, minutes: number, spread = 0.4): LoadPlan['habit'] => ({
    kind: 'runs',
    perDay,
    profile: BAKING,
    minutes,
    spread,
  })
  const single = { isolation: 'single-pole' as const, neutralShare: 0.1, device: 'B16' }
  return [
    {
      ...single,
      ref: '1',
      label: 'Deck oven left',
      device: 'C32',
      standing: { g: 0.05, b: 0.4 },
      loads: [
        load({
          ref: 'oven-left',
          label: 'Deck oven left',
          habit: runs(5, 70),
          amps: 24,
          on: { g: 0.35, b: 1.9 },
          idle: { g: 0, b: 1.6 },
        }),
      ],
    },
    {
      ...single,
      ref: '2',
      label: 'Deck oven right',
      device: 'C32',
      standing: { g: 0.05, b: 0.4 },
      loads: [
        load({
          ref: 'oven-right',
          label: 'Deck oven right',
          habit: runs(4, 60),
          amps: 24,
          on: { g: 0.3, b: 1.7 },
          idle: { g: 0, b: 1.6 },
        }),
      ],
    },
    {
      ...single,
      ref: '3',
      label: 'Walk-in freezer',
      standing: { g: 0.1, b: 2.4 },
      loads: [
        load({
          ref: 'compressor',
          label: 'Freezer compressor',
          habit: { kind: 'cycle', onMinutes: 17, offMinutes: 23, spread: 0.15 },
          amps: 5.5,
          on: { g: 0.1, b: 0.7 },
          idle: { g: 0, b: 0.2 },
        }),
        load({
          ref: 'defrost',
          label: 'Defrost heater',
          habit: { kind: 'every', hours: 8.2, minutes: 23, jitter: 1.5, first: 5.1 },
          amps: 7,
          on: { g: 0.1, b: 0.1 },
          idle: { g: 0, b: 0.05 },
          fault: { kind: 'warming', mA: 28, spread: 0.12, riseMinutes: 4, dryMinutes: 22, dampHours: 3 },
        }),
      ],
    },
    {
      ...single,
      ref: '4',
      label: 'Proving cabinet',
      standing: { g: 0.05, b: 0.5 },
      loads: [
        load({
          ref: 'prover',
          label: 'Proving cabinet',
          habit: runs(4, 110),
          amps: 9,
          on: { g: 0.4, b: 2.1 },
          idle: { g: 0, b: 0.5 },
        }),
      ],
    },
    {
      ...single,
      ref: '7',
      label: 'Bakehouse sockets',
      standing: { g: 0.05, b: 1.6 },
      loads: [
        load({
          ref: 'mixer',
          label: 'Mixer',
          habit: runs(36, 21),
          amps: 8,
          on: { g: 0.1, b: 0.9 },
          idle: { g: 0, b: 0.3 },
          resumes: false,
        }),
        load({
          ref: 'sheeter',
          label: 'Dough sheeter',
          habit: runs(6, 12),
          amps: 3,
          on: { g: 0.05, b: 0.4 },
          idle: { g: 0, b: 0.2 },
          resumes: false,
          monitored: false,
        }),
      ],
    },
  ]
}

function shop(): CircuitPlan[] {
  const single = { isolation: 'single-pole' as const, neutralShare: 0.1, device: 'B16' }
  return [
    {
      ...single,
      ref: '11',
      label: 'Shop sockets',
      standing: { g: 0.1, b: 1.2 },
      loads: [
        load({
          ref: 'coffee',
          label: 'Coffee machine',
          habit: { kind: 'runs', perDay: 30, profile: SHOP, minutes: 4, spread: 0.5 },
          amps: 11,
          on: { g: 0.3, b: 0.8 },
          idle: { g: 0, b: 0.4 },
          monitored: false,
        }),
        load({
          ref: 'till',
          label: 'Till and scales',
          habit: { kind: 'always' },
          amps: 0.5,
          on: { g: 0, b: 1.1 },
          idle: { g: 0, b: 0 },
          monitored: false,
        }),
      ],
    },
    {
      ...single,
      ref: '12',
      label: 'Sign lights',
      device: 'B10',
      standing: { g: 0.05, b: 0.6 },
      loads: [
        load({
          ref: 'sign',
          label: 'Sign lights',
          habit: { kind: 'dusk', degrees: -2.5, until: 23 * 60 },
          amps: 1.6,
          on: { g: 0.1, b: 2.6 },
          idle: { g: 0, b: 0 },
        }),
      ],
    },
    {
      ...single,
      ref: '13',
      label: 'Outdoor socket',
      standing: { g: 0.05, b: 0.4 },
      damp: { mA: 34, lagHours: 2, decayHours: 6, soakMm: 5 },
      loads: [],
    },
  ]
}
