import { requireRange } from './checks.ts'

/** Positions of p-values from the smallest to the largest; ties keep their order. Throws `out_of_range` outside [0, 1]. */
export function orderOfPValues(name: string, p: ArrayLike<number>): Uint32Array {
  for (let i = 0; i < p.length; i++) requireRange(name, p[i]! >= 0 && p[i]! <= 1, 'p-values from 0 to 1', p[i])
  return Uint32Array.from({ length: p.length }, (_, i) => i).sort((a, b) => p[a]! - p[b]! || a - b)
}
