/** Leakage of one thing, mA r.m.s.: `g` in phase with the voltage (conductive), `b` a quarter period ahead (capacitive). */
export interface Phasor {
  readonly g: number
  readonly b: number
}

/** No leakage. */
export const NOTHING: Phasor = { g: 0, b: 0 }

/** What a clamp or an RCD sees of a phasor, mA: √(g² + b²). */
export function magnitude(phasor: Phasor): number {
  return Math.sqrt(phasor.g * phasor.g + phasor.b * phasor.b)
}

/**
 * The conductive leakage that lifts a phasor to a magnitude, mA; 0 when it stands there already, NaN when capacitive
 * leakage alone is above it.
 */
export function conductiveTo(phasor: Phasor, mA: number): number {
  return Math.max(0, Math.sqrt(mA * mA - phasor.b * phasor.b) - phasor.g)
}
