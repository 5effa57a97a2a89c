import type { TimedStep } from '../../contract/findings.ts'
import { WEEKDAYS, type Weekday } from '../../timeline/local-clock.ts'
import { clockText } from '../windows/clock-windows.ts'
import { current, figure, rounded } from '../words.ts'
import type { TimedSchedule } from './schedule.ts'
import type { TimedCluster } from './timed-clusters.ts'

const METHOD =
  'change points with the biweight loss (Fearnhead & Rigaill 2019), rises paired with falls, schedules by scan statistics and combs, all tried paid for'
const DAY_NAMES: Readonly<Record<Weekday, string>> = {
  mon: 'Mondays',
  tue: 'Tuesdays',
  wed: 'Wednesdays',
  thu: 'Thursdays',
  fri: 'Fridays',
  sat: 'Saturdays',
  sun: 'Sundays',
}

/** A cluster as the findings tell it, in words and figures. */
export function timedStepOf(cluster: TimedCluster): TimedStep {
  const { heightMa, minutes, count, schedule } = cluster
  const text = `About ${current(heightMa)} mA for ${lengthWords(minutes)}, ${whenWords(schedule)}, on no named load.`
  return {
    ma: rounded(heightMa),
    low: rounded(cluster.heightLow),
    high: rounded(cluster.heightHigh),
    minutes: rounded(minutes),
    count,
    schedule: schedule.kind,
    ...fieldsOf(schedule),
    spreadMinutes: rounded(schedule.spreadMinutes),
    kept: rounded(schedule.kept),
    p: rounded(schedule.p),
    method: METHOD,
    text,
  }
}

function fieldsOf(schedule: TimedSchedule): Partial<TimedStep> {
  switch (schedule.kind) {
    case 'clock': {
      const localTimes = schedule.minutes.map(clockText)
      return { localTime: localTimes[0]!, localTimes, days: [...schedule.days] }
    }
    case 'period':
      return { hours: rounded(schedule.hours), standsStill: schedule.on === 'supply' }
    case 'sun':
      return { event: schedule.event, offsetMinutes: rounded(schedule.offsetMinutes) }
    default:
      return schedule satisfies never
  }
}

/** When it comes: "every day at 03:10 ± 2 minutes". */
export function whenWords(schedule: TimedSchedule): string {
  const spread = minutesWords(schedule.spreadMinutes)
  switch (schedule.kind) {
    case 'clock': {
      const times = listed(schedule.minutes.map(clockText))
      const moved = schedule.sunMoved
      const doubt =
        moved === undefined
          ? ''
          : ` (the sun moved by ${minutesWords(moved)} meanwhile: a time switch and a photocell cannot be told apart yet)`
      return `${daysWords(schedule.days)} at ${times} ± ${spread}${doubt}`
    }
    case 'period': {
      const anew = (schedule.begunAnew?.length ?? 1) > 1
      const still = anew
        ? ' (its count began anew at times, as after a cut of supply)'
        : schedule.on === 'supply'
          ? ' of supply (its clock stands still without)'
          : ''
      return `every ${figure(schedule.hours)} hours${still} ± ${spread}`
    }
    case 'sun': {
      const offset = Math.round(schedule.offsetMinutes)
      const from = offset === 0 ? 'at' : `${minutesWords(Math.abs(offset))} ${offset > 0 ? 'after' : 'before'}`
      return `every day ${from} ${schedule.event} ± ${spread}`
    }
    default:
      return schedule satisfies never
  }
}

function daysWords(days: readonly Weekday[]): string {
  const key = days.join(' ')
  if (days.length === WEEKDAYS.length) return 'every day'
  if (key === 'mon tue wed thu fri') return 'Mondays to Fridays'
  if (days.length === 6) return `every day but ${DAY_NAMES[WEEKDAYS.find((day) => !days.includes(day))!]}`
  return listed(days.map((day) => DAY_NAMES[day]))
}

function listed(words: readonly string[]): string {
  if (words.length < 2) return words.join('')
  return `${words.slice(0, -1).join(', ')} and ${words.at(-1)}`
}

function minutesWords(minutes: number): string {
  const whole = Math.max(1, Math.round(minutes))
  return whole === 1 ? '1 minute' : `${whole} minutes`
}

function lengthWords(minutes: number): string {
  return minutes < 120 ? minutesWords(minutes) : `${figure(minutes / 60)} hours`
}
