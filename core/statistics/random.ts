import { requireCount, requireRange } from './checks.ts'
import { hashText } from './hash-text.ts'
import { logGamma } from './log-gamma.ts'

/** A stream of draws that depends on nothing but its seed. */
export interface Random {
  /** Uniform on [0, 1), 53 bits. */
  uniform(): number
  /** Normal with this mean and standard deviation. */
  normal(mean?: number, sd?: number): number
  /** Exponential with this mean. */
  exponential(mean?: number): number
  /** Poisson count with this mean. */
  poisson(mean: number): number
  /** Whole number from 0 to bound − 1, without bias. */
  integer(bound: number): number
  /** One of the items. */
  pick<T>(items: ArrayLike<T>): T
  /** A shuffled copy (Fisher & Yates). */
  shuffle<T>(items: ArrayLike<T>): T[]
}

/**
 * Seeded random generator: the same seed gives the same draws, always. The bits come from sfc32, a small
 * generator with 128 bits of state that passes PractRand; text or number seeds are hashed into the state.
 *
 * @see Doty-Humphrey (2010), PractRand, generator sfc
 * @see Box & Muller (1958), Ann. Math. Statist. 29, 610-611; Hörmann (1993), Insurance: Math. and Economics 12, 39-45
 */
export function seededRandom(seed: number | string): Random {
  const next = sfc32(typeof seed === 'number' ? `number ${seed}` : `text ${seed}`)
  const uniform = (): number => ((next() >>> 5) * 67_108_864 + (next() >>> 6)) / 9_007_199_254_740_992

  const integer = (bound: number): number => {
    requireRange(
      'integer',
      Number.isSafeInteger(bound) && bound > 0 && bound <= 0x1_0000_0000,
      'a whole bound from 1 to 2^32',
      bound,
    )
    // Draws above the last full multiple of the bound would favour small numbers; draw again.
    const limit = 0x1_0000_0000 - (0x1_0000_0000 % bound)
    for (;;) {
      const draw = next()
      if (draw < limit) return draw % bound
    }
  }

  return {
    uniform,
    integer,
    normal: (mean = 0, sd = 1) =>
      mean + sd * Math.sqrt(-2 * Math.log1p(-uniform())) * Math.cos(2 * Math.PI * uniform()),
    exponential: (mean = 1) => -mean * Math.log1p(-uniform()),
    poisson: (mean) => {
      requireRange('poisson', mean >= 0 && mean < Number.POSITIVE_INFINITY, 'a finite mean from 0', mean)
      return mean < 10 ? poissonByProduct(mean, uniform) : poissonByRejection(mean, uniform)
    },
    pick: (items) => {
      requireCount('pick', items.length, 1)
      return items[integer(items.length)]!
    },
    shuffle: (items) => {
      const copy = Array.from(items)
      for (let i = copy.length - 1; i > 0; i--) {
        const j = integer(i + 1)
        const held = copy[i]!
        copy[i] = copy[j]!
        copy[j] = held
      }
      return copy
    },
  }
}

function sfc32(seed: string): () => number {
  let a = hashText(seed, 1)
  let b = hashText(seed, 2)
  let c = hashText(seed, 3)
  let counter = 1
  const next = (): number => {
    const out = (a + b + counter) | 0
    counter = (counter + 1) | 0
    a = b ^ (b >>> 9)
    b = (c + (c << 3)) | 0
    c = ((c << 21) | (c >>> 11)) + out
    return out >>> 0
  }
  // The first rounds still show the seed's pattern.
  for (let i = 0; i < 15; i++) next()
  return next
}

/** Counts uniform factors until their product falls below e^−mean. */
function poissonByProduct(mean: number, uniform: () => number): number {
  const floor = Math.exp(-mean)
  let product = uniform()
  let count = 0
  while (product > floor) {
    product *= uniform()
    count++
  }
  return count
}

/** Hörmann's transformed rejection PTRS, for means from 10 up. */
function poissonByRejection(mean: number, uniform: () => number): number {
  const logMean = Math.log(mean)
  const b = 0.931 + 2.53 * Math.sqrt(mean)
  const a = -0.059 + 0.02483 * b
  const inverseAlpha = 1.1239 + 1.1328 / (b - 3.4)
  const vr = 0.9277 - 3.6224 / (b - 2)
  for (;;) {
    const u = uniform() - 0.5
    const v = uniform()
    const us = 0.5 - Math.abs(u)
    const k = Math.floor(((2 * a) / us + b) * u + mean + 0.43)
    if (us >= 0.07 && v <= vr) return k
    if (k < 0 || (us < 0.013 && v > us)) continue
    if (Math.log((v * inverseAlpha) / (a / (us * us) + b)) <= k * logMean - mean - logGamma(k + 1)) return k
  }
}
