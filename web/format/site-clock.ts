import { LOCALE } from './numbers.ts'

/** The parts of an instant on the site's wall clock; month from 1. */
export interface WallTime {
  readonly year: number
  readonly month: number
  readonly day: number
  readonly hour: number
  readonly minute: number
  readonly second: number
}

/** Everything the page says about time, in the site's zone. Instants are epoch ms. */
export interface SiteClock {
  readonly zone: string
  /** `Tue 22 Sept, 02:14` */
  moment(t: number): string
  /** The same with seconds. */
  exactMoment(t: number): string
  /** `Tue 22 Sept` */
  day(t: number): string
  /** `02:14` */
  time(t: number): string
  /** From one moment to another, the day said once when it is the same. */
  span(from: number, to: number): string
  wall(t: number): WallTime
  /** The instant at which the wall clock shows this; of a doubled hour the first, of a left-out one the moment after. */
  instant(wall: WallTime): number
  /** First instant of the local day that holds t, moved by whole days. */
  midnight(t: number, daysOn?: number): number
}

/** @throws {RangeError} when the browser does not know the zone */
export function siteClock(zone: string): SiteClock {
  const format = (options: Intl.DateTimeFormatOptions): Intl.DateTimeFormat =>
    new Intl.DateTimeFormat(LOCALE, { timeZone: zone, hourCycle: 'h23', ...options })
  const dayFormat = format({ weekday: 'short', day: 'numeric', month: 'short' })
  const timeFormat = format({ hour: '2-digit', minute: '2-digit' })
  const exactFormat = format({ hour: '2-digit', minute: '2-digit', second: '2-digit' })
  const partsFormat = new Intl.DateTimeFormat('en-US', {
    timeZone: zone,
    hourCycle: 'h23',
    year: 'numeric',
    month: 'numeric',
    day: 'numeric',
    hour: 'numeric',
    minute: 'numeric',
    second: 'numeric',
  })
  const wall = (t: number): WallTime => {
    const found: Record<string, number> = {}
    for (const part of partsFormat.formatToParts(t)) {
      if (part.type !== 'literal') found[part.type] = Number(part.value)
    }
    return found as unknown as WallTime
  }
  const offset = (t: number): number => {
    const whole = Math.floor(t / 1000) * 1000
    return utcOf(wall(whole)) - whole
  }
  const instant = (at: WallTime): number => {
    const local = utcOf(at)
    const early = local - offset(local - 86_400_000)
    if (early + offset(early) === local) return early
    const late = local - offset(local + 86_400_000)
    return late + offset(late) === local ? late : early
  }
  const day = (t: number): string => dayFormat.format(t).replace(',', '')
  const moment = (t: number): string => `${day(t)}, ${timeFormat.format(t)}`
  return {
    zone,
    day,
    moment,
    time: (t) => timeFormat.format(t),
    exactMoment: (t) => `${day(t)}, ${exactFormat.format(t)}`,
    span: (from, to) =>
      day(from) === day(to)
        ? `${day(from)}, ${timeFormat.format(from)} to ${timeFormat.format(to)}`
        : `${moment(from)} to ${moment(to)}`,
    wall,
    instant,
    midnight: (t, daysOn = 0) => {
      const { year, month, day: dayOfMonth } = wall(t)
      return instant({ year, month, day: dayOfMonth + daysOn, hour: 0, minute: 0, second: 0 })
    },
  }
}

function utcOf(at: WallTime): number {
  return Date.UTC(at.year, at.month - 1, at.day, at.hour, at.minute, at.second)
}
