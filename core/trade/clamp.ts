import { CoreError } from '../errors.ts'
import type { Bounds } from './leakage.ts'

/** Accuracy as printed in a clamp's data: ±(percent of reading + digits of the last place). */
export interface ClampAccuracy {
  readonly percent: number
  readonly digits: number
}

/**
 * Where the true current lies by the clamp's stated accuracy, mA; never below 0. Below a few tenths of a mA it is
 * mostly the digits. The way of stating it is common practice of instrument data.
 * @throws {CoreError} out_of_range when the reading, the accuracy or the digit is negative or not finite
 */
export function clampInterval(readingMa: number, accuracy: ClampAccuracy, resolutionMa: number): Bounds {
  for (const x of [readingMa, accuracy.percent, accuracy.digits, resolutionMa]) {
    if (!(x >= 0 && Number.isFinite(x)))
      throw new CoreError('out_of_range', `clampInterval needs numbers of 0 or more, got ${x}`)
  }
  const half = (accuracy.percent / 100) * readingMa + accuracy.digits * resolutionMa
  return { low: Math.max(0, readingMa - half), high: readingMa + half }
}
