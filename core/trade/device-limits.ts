import type { Rcd } from '../contract/site-sheet.ts'
import { CoreError } from '../errors.ts'

type Type = Rcd['type']
type Delay = Rcd['delay']

/** Share of IΔn at or below which a device must not trip on sinusoidal a.c. IEC 61008-1, IEC 61009-1 (from memory). */
export const MUST_NOT_TRIP_SHARE = 0.5

/** Share of IΔn at or below which it must trip on sinusoidal a.c. IEC 61008-1, IEC 61009-1 (from memory). */
export const MUST_TRIP_SHARE = 1

/** Most standing leakage to plan for, as a share of IΔn. BS 7671:2018+A2 regulation 531.3.2 (from memory). */
export const ADVISED_SHARE = 0.3

/** A sound 30 mA device opens from about here on a ramp test, as a share of IΔn. Common practice. */
export const USUAL_RAMP_SHARE = 2 / 3

/** A current between two bounds, mA. */
export interface TripRange {
  readonly low: number
  readonly high: number
}

/** Where a device may trip on sinusoidal a.c.: between 0.5 IΔn and IΔn. IEC 61008-1, IEC 61009-1 (from memory). */
export function sinusoidalTripRange(ratedMa: number): TripRange {
  return { low: MUST_NOT_TRIP_SHARE * ratedMa, high: MUST_TRIP_SHARE * ratedMa }
}

/** Current delay angles at which pulsating d.c. is tested, degrees. */
export type DelayAngle = 0 | 90 | 135

const PULSATING_FROM: Readonly<Record<DelayAngle, number>> = { 0: 0.35, 90: 0.25, 135: 0.11 }

/**
 * Where a device may trip on pulsating d.c.: from 0.35, 0.25 or 0.11 IΔn at a current delay angle of 0°, 90° or 135°,
 * to 1.4 IΔn (2 IΔn up to 10 mA). Null for type AC, which need not see pulsating d.c. at all. IEC 61008-1, IEC 61009-1 (from memory).
 */
export function pulsatingTripRange(ratedMa: number, type: Type, angle: DelayAngle = 0): TripRange | null {
  if (type === 'AC') return null
  return { low: PULSATING_FROM[angle] * ratedMa, high: (ratedMa <= 10 ? 2 : 1.4) * ratedMa }
}

/** Smooth d.c. that may lie over the residual current without blinding the device, mA; null where there is no such limit. */
export function toleratedSmoothDcMa(type: Type): number | null {
  switch (type) {
    case 'AC':
      return 0 // nothing is required of it
    case 'A':
      return 6 // IEC 61008-1 (from memory)
    case 'F':
      return 10 // IEC 62423 (from memory)
    case 'B':
      return null // sees smooth d.c. itself, IEC 62423 (from memory)
    default:
      return type satisfies never
  }
}

/** How quickly a device opens, ms. */
export interface BreakTimes {
  /** Opens within this time. */
  readonly largest: number
  /** Does not open on anything shorter; 0 for the general type. */
  readonly leastNonActuating: number
}

const GENERAL: readonly BreakTimes[] = [
  { largest: 300, leastNonActuating: 0 },
  { largest: 150, leastNonActuating: 0 },
  { largest: 40, leastNonActuating: 0 },
]
const SELECTIVE: readonly BreakTimes[] = [
  { largest: 500, leastNonActuating: 130 },
  { largest: 200, leastNonActuating: 60 },
  { largest: 150, leastNonActuating: 50 },
]

/**
 * Limiting break times at a residual current given in multiples of IΔn: those of the greatest tabled multiple (1, 2, 5)
 * that it reaches; null below IΔn, where the standard promises none. IEC 61008-1, table of limiting break times (from memory).
 * @throws {CoreError} out_of_range for a multiple that is negative or not finite
 */
export function breakTimes(delay: Delay, multipleOfRated: number): BreakTimes | null {
  if (!(multipleOfRated >= 0 && Number.isFinite(multipleOfRated)))
    throw new CoreError('out_of_range', `breakTimes needs a multiple of 0 or more, got ${multipleOfRated}`)
  if (multipleOfRated < 1) return null
  const table = delay === 'S' ? SELECTIVE : GENERAL
  return table[multipleOfRated >= 5 ? 2 : multipleOfRated >= 2 ? 1 : 0]!
}
