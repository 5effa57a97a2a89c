import { count, fixed } from './numbers.ts'

const NBSP = '\u00a0'

/** A length of time in words with at most two units: `45 s`, `12 min`, `3 h 20 min`, `2 days 4 h`. */
export function duration(ms: number): string {
  const seconds = Math.max(0, ms / 1000)
  if (seconds < 90) return `${fixed(seconds, 0)}${NBSP}s`
  const minutes = Math.round(seconds / 60)
  if (minutes < 120) return `${minutes}${NBSP}min`
  const hours = Math.floor(minutes / 60)
  if (hours < 48) return minutes % 60 === 0 ? `${hours}${NBSP}h` : `${hours}${NBSP}h ${minutes % 60}${NBSP}min`
  const whole = Math.round(minutes / 60)
  const rest = whole % 24
  return rest === 0 ? count(whole / 24, 'day') : `${count(Math.floor(whole / 24), 'day')} ${rest}${NBSP}h`
}

/** Hours in words: `0.5 h`, `31 h`, `6 days 4 h`. */
export function hours(value: number): string {
  return value < 2 ? `${fixed(value, 1)}${NBSP}h` : duration(Math.round(value) * 3_600_000)
}
