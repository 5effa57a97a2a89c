/** The page's words are English, so are its figures; only the time zone is the site's. */
export const LOCALE = 'en-GB'

const plain = [0, 1, 2].map(
  (digits) => new Intl.NumberFormat(LOCALE, { minimumFractionDigits: digits, maximumFractionDigits: digits }),
)

/** A narrow space that does not break keeps figure and unit together. */
export const THIN = '\u202f'

/** A number with a fixed number of decimals (0 to 2). */
export function fixed(value: number, digits: 0 | 1 | 2): string {
  const text = plain[digits]!.format(value)
  return /^-0(\.0+)?$/.test(text) ? text.slice(1) : text.replace('-', '−')
}

/** Milliamps without the unit: two decimals below 1, one below 100. */
export function milliampsBare(value: number): string {
  const size = Math.abs(value)
  return fixed(value, size < 0.995 ? 2 : size < 99.95 ? 1 : 0)
}

export function milliamps(value: number): string {
  return `${milliampsBare(value)}${THIN}mA`
}

/** `low to high mA` with one unit. */
export function milliampRange(low: number, high: number): string {
  return `${milliampsBare(low)} to ${milliamps(high)}`
}

export function percent(share: number): string {
  const value = share * 100
  if (value > 0 && value < 0.5) return `under 1${THIN}%`
  return `${fixed(value, 0)}${THIN}%`
}

/** A probability with two decimals; never 0 or 1, which no data give. */
export function odds(probability: number): string {
  if (probability > 0.995) return 'over 0.99'
  if (probability < 0.005) return 'under 0.01'
  return fixed(probability, 2)
}

/** `3 trips`, `1 trip`. */
export function count(n: number, one: string, many = `${one}s`): string {
  return `${fixed(n, 0)} ${n === 1 ? one : many}`
}

/** Whatever a figure of a reason holds, readable. */
export function figure(value: number | string | boolean | null): string {
  if (value === null) return 'not known'
  if (typeof value === 'boolean') return value ? 'yes' : 'no'
  if (typeof value === 'string') return value
  if (Number.isInteger(value)) return fixed(value, 0)
  const size = Math.abs(value)
  if (size >= 100) return fixed(value, 0)
  if (size >= 0.01) return fixed(value, 2)
  return value.toPrecision(2)
}
