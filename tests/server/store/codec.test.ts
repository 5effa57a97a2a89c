import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { decodeBlock, encodeBlock } from '../../../server/store/sqlite/codec.ts'
import { crc32 } from '../../../server/store/sqlite/crc32.ts'

const bits = (x: ArrayLike<number>): BigUint64Array => new BigUint64Array(Float64Array.from(x).buffer)

function expectSame(t: readonly number[], v: readonly number[]): Uint8Array {
  const bytes = encodeBlock(Float64Array.from(t), Float64Array.from(v))
  const back = decodeBlock(bytes, t.length)
  expect(bits(back.t)).toEqual(bits(t))
  expect(bits(back.v)).toEqual(bits(v))
  return bytes
}

const times = (steps: readonly number[]): number[] => {
  let t = 1_790_000_000_000
  return steps.map((step) => {
    t += step
    return t
  })
}

const decimal = fc
  .tuple(fc.integer({ min: -(2 ** 40), max: 2 ** 40 }), fc.integer({ min: 0, max: 8 }))
  .map(([m, k]) => m / 10 ** k)
const near = fc.integer({ min: -400, max: 400 }).map((m) => m / 100)
const single = fc.float({ noNaN: true, noDefaultInfinity: true })
const double = fc.double({ noNaN: true, noDefaultInfinity: true })

describe('encodeBlock and decodeBlock', () => {
  it('give back every bit', () => {
    const step = fc.oneof(fc.constant(1_000), fc.integer({ min: 1, max: 3_000 }), fc.integer({ min: 1, max: 2 ** 40 }))
    for (const value of [near, decimal, single, double, fc.oneof(near, decimal), fc.oneof(near, double)]) {
      fc.assert(
        fc.property(fc.array(fc.tuple(step, value), { maxLength: 200 }), (rows) => {
          expectSame(
            times(rows.map((row) => row[0])),
            rows.map((row) => row[1]),
          )
        }),
      )
    }
  })

  it.each([
    ['signed zeros', [0, -0, 0, -0]],
    ['subnormals', [Number.MIN_VALUE, -Number.MIN_VALUE, 0, 2 ** -1040]],
    ['sums that are no decimals', [0.1 + 0.2, 0.3, 0.1]],
    ['the largest doubles', [Number.MAX_VALUE, -Number.MAX_VALUE]],
    ['integers beyond 2^53', [2 ** 53, 2 ** 53 + 2, -(2 ** 60)]],
    ['large integers before small decimals', [2 ** 49, 2 ** 49 + 1, 0.000001]],
    ['decimals that grow', [1, 1.5, 1.25, 1.125, 1.0625, 1.03125, 1.015625]],
    ['states in long runs', [...Array(900).fill(0), ...Array(900).fill(1), ...Array(900).fill(0)]],
    ['nothing', []],
  ])('keep %s', (_name, v) => {
    expectSame(times(v.map(() => 1_000)), v)
  })

  it('keep times that are no whole milliseconds', () => {
    expectSame([0.5, 1.25, 7], [1, 2, 3])
    expectSame([-3, -0, 5], [1, 2, 3])
  })

  it('spend next to nothing on a regular clock and on a state that holds', () => {
    const t = times(Array(3_600).fill(1_000))
    expect(expectSame(t, Array(3_600).fill(1)).length).toBeLessThan(30)
    const noisy = t.map((_, i) => 12 + ((i * 7_919) % 50) / 100)
    expect(expectSame(t, noisy).length).toBeLessThan(1.01 * 3_600)
  })

  it('refuse bytes that are no such block', () => {
    const bytes = encodeBlock(Float64Array.of(1, 2, 3), Float64Array.of(0.1, 0.2, 7))
    const corrupt = expect.objectContaining({ code: 'corrupt_data' })
    expect(() => decodeBlock(bytes.subarray(0, bytes.length - 1), 3)).toThrow(corrupt)
    expect(() => decodeBlock(bytes, 2)).toThrow(corrupt)
    expect(() => decodeBlock(bytes, 4)).toThrow(corrupt)
  })
})

describe('crc32', () => {
  // Check value of CRC-32/ISO-HDLC, as ITU-T V.42 and every list of CRC parameters print it.
  it('gives CBF43926 for 123456789', () => {
    expect(crc32(new TextEncoder().encode('123456789')).toString(16)).toBe('cbf43926')
  })
})
