import { readFileSync } from 'node:fs'
import { expect, it } from 'vitest'

/** One case of a file in fixtures/reference; README.md there says what each field means. */
export interface ReferenceCase {
  readonly name: string
  // biome-ignore lint/suspicious/noExplicitAny: the shape of the data differs from file to file
  readonly input: any
  readonly expected: Readonly<Record<string, unknown>>
  readonly tolerance: number
  readonly abs_tolerance: number
  readonly tolerance_by_key?: Readonly<Record<string, number>>
}

export interface CompareOptions {
  /** Cases for which the project chose another answer; each must have its own test beside. */
  readonly except?: readonly string[]
  /** Keys that are directions on a circle: compared modulo the period named by the input. */
  readonly circular?: readonly string[]
  /** Looser relative bounds for single keys; say why beside each. */
  readonly loosen?: Readonly<Record<string, number>>
}

/** Reads a file of fixtures/reference. */
export function referenceCases(file: string): readonly ReferenceCase[] {
  const url = new URL(`../../../fixtures/reference/${file}`, import.meta.url)
  return JSON.parse(readFileSync(url, 'utf8')).cases
}

/**
 * One test a case: what `compute` returns is compared key by key under the file's tolerance rule. Keys that the file lacks
 * for a case (not computed there) are passed over, but at least one key must meet its match.
 */
export function matchReference(
  file: string,
  // biome-ignore lint/suspicious/noExplicitAny: as above
  compute: (input: any, name: string) => Record<string, unknown>,
  options: CompareOptions = {},
): void {
  const cases = referenceCases(file)
  for (const name of options.except ?? []) {
    if (!cases.some((c) => c.name === name)) throw new Error(`${file} has no case ${name}`)
  }
  for (const given of cases) {
    if (options.except?.includes(given.name)) continue
    it(`agrees with ${file}: ${given.name}`, () => {
      const got = compute(deepFreeze(given.input), given.name)
      const keys = Object.keys(got).filter((key) => key in given.expected)
      expect(keys.length, 'keys in common with the file').toBeGreaterThan(0)
      for (const key of keys) {
        const relative = options.loosen?.[key] ?? given.tolerance_by_key?.[key] ?? given.tolerance
        const period = options.circular?.includes(key) ? (given.input.period as number) : undefined
        compare(key, got[key], given.expected[key], relative, given.abs_tolerance, period)
      }
    })
  }
}

function compare(path: string, got: unknown, want: unknown, relative: number, absolute: number, period?: number): void {
  if (Array.isArray(want)) {
    const list = got as ArrayLike<unknown>
    expect(list.length, `${path}: length`).toBe(want.length)
    want.forEach((item, i) => {
      compare(`${path}[${i}]`, list[i], item, relative, absolute, period)
    })
  } else if (typeof want === 'number') {
    expect(typeof got, `${path}: a number, got ${String(got)}`).toBe('number')
    let distance = Math.abs((got as number) - want)
    if (period !== undefined) distance = Math.min(distance % period, period - (distance % period))
    const bound = relative * Math.abs(want) + absolute
    expect(distance <= bound, `${path}: got ${String(got)}, want ${want}, off by ${distance}, allowed ${bound}`).toBe(
      true,
    )
  } else if (want === 'Infinity' || want === '-Infinity') {
    expect(got, path).toBe(want === 'Infinity' ? Number.POSITIVE_INFINITY : Number.NEGATIVE_INFINITY)
  } else {
    expect(got, path).toEqual(want)
  }
}

/** Freezes plain arrays and objects all the way down, so that a method that writes to its input throws. */
function deepFreeze<T>(value: T): T {
  if (typeof value === 'object' && value !== null && !Object.isFrozen(value)) {
    Object.freeze(value)
    for (const part of Object.values(value)) deepFreeze(part)
  }
  return value
}
