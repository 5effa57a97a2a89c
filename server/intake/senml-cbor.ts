import { decode } from 'cborg'
import { Refused } from './refused.ts'

/** The integer labels of CBOR records (RFC 8428, table 6; from memory). */
export const CBOR_LABELS: ReadonlyMap<number, string> = new Map([
  [-1, 'bver'],
  [-2, 'bn'],
  [-3, 'bt'],
  [-4, 'bu'],
  [-5, 'bv'],
  [-6, 'bs'],
  [0, 'n'],
  [1, 'u'],
  [2, 'v'],
  [3, 'vs'],
  [4, 'vb'],
  [5, 's'],
  [6, 't'],
  [7, 'ut'],
  [8, 'vd'],
])

/** Tag 4 of RFC 8949: a decimal fraction, [exponent, mantissa]. */
function decimalFraction(read: () => unknown): number {
  const pair = read()
  if (!Array.isArray(pair) || pair.length !== 2) throw new Error('a decimal fraction is a pair')
  const [exponent, mantissa] = pair as [unknown, unknown]
  const whole = typeof mantissa === 'bigint' || Number.isInteger(mantissa)
  if (!Number.isInteger(exponent) || !whole) throw new Error('a decimal fraction is made of whole numbers')
  return Number(`${mantissa}e${exponent}`)
}

const OPTIONS = {
  useMaps: true,
  rejectDuplicateMapKeys: true,
  allowNaN: false,
  allowInfinity: false,
  tags: {
    4: decimalFraction,
    // "This is CBOR", in front of the whole.
    55799: (read: () => unknown) => read(),
  },
}

/**
 * A pack in CBOR as the same pack in JSON would be read: integer labels by their names, byte strings as text.
 * @throws {Refused} unreadable
 */
export function readSenmlCbor(bytes: Uint8Array): unknown {
  const pack = decodeStrictly(bytes)
  if (!Array.isArray(pack)) throw new Refused('A SenML pack in CBOR is an array of maps.')
  return pack.map((record: unknown, i) => {
    if (!(record instanceof Map)) throw new Refused('The body does not fit.', [{ path: `/${i}`, why: 'must be a map' }])
    return recordOf(record, i)
  })
}

function decodeStrictly(bytes: Uint8Array): unknown {
  try {
    return decode(bytes, OPTIONS)
  } catch (error) {
    // RangeError: nested deeper than the stack.
    if (!(error instanceof Error)) throw error
    throw new Refused('The body is not valid CBOR.', [], { kind: 'unreadable' })
  }
}

function recordOf(record: ReadonlyMap<unknown, unknown>, i: number): Readonly<Record<string, unknown>> {
  const fields = new Map<string, unknown>()
  for (const [key, value] of record) {
    const label = typeof key === 'number' ? (CBOR_LABELS.get(key) ?? String(key)) : key
    if (typeof label !== 'string') {
      throw new Refused('The body does not fit.', [{ path: `/${i}`, why: 'a label is a whole number or text' }])
    }
    if (fields.has(label)) {
      throw new Refused('The body does not fit.', [{ path: `/${i}/${label.slice(0, 80)}`, why: 'stands there twice' }])
    }
    fields.set(label, plain(value))
  }
  return Object.fromEntries(fields)
}

function plain(value: unknown): unknown {
  if (typeof value === 'bigint') return Number(value)
  if (value instanceof Uint8Array) return Buffer.from(value).toString('base64url')
  return value
}
