/** A residual current in its two parts, mA: through resistance, in phase with the voltage, and through capacitance. */
export interface Phasor {
  readonly conductive: number
  readonly capacitive: number
}

/** Bounds of a magnitude, mA. */
export interface Bounds {
  readonly low: number
  readonly high: number
}

/** Current through a capacitance, mA: I = 2π f C U. Farads, volts, hertz. */
export function capacitiveMa(farads: number, volts: number, hertz: number): number {
  return 2 * Math.PI * hertz * farads * volts * 1_000
}

/** Sum of residual currents of one phase, part by part. */
export function phasorSum(parts: Iterable<Phasor>): Phasor {
  let conductive = 0
  let capacitive = 0
  for (const part of parts) {
    conductive += part.conductive
    capacitive += part.capacitive
  }
  return { conductive, capacitive }
}

/** What a clamp and the device see of it, mA: |I| = √(G² + B²). */
export function magnitude({ conductive, capacitive }: Phasor): number {
  return Math.hypot(conductive, capacitive)
}

/**
 * What is known of a sum when only magnitudes are: |a − b| ≤ |a + b| ≤ a + b for two; for more, what the largest
 * exceeds all others together by, to the plain sum. Magnitudes in mA, 0 or more.
 */
export function magnitudeBounds(magnitudes: Iterable<number>): Bounds {
  let sum = 0
  let largest = 0
  for (const m of magnitudes) {
    sum += m
    if (m > largest) largest = m
  }
  return { low: Math.max(0, 2 * largest - sum), high: sum }
}

/** What one part adds to the whole: the magnitude with it less the magnitude without it. May be negative. */
export function marginalMa(part: Phasor, whole: Phasor): number {
  const without = {
    conductive: whole.conductive - part.conductive,
    capacitive: whole.capacitive - part.capacitive,
  }
  return magnitude(whole) - magnitude(without)
}

/**
 * Share of the whole's magnitude that a part makes up: its projection on the whole. Shares of all parts add up to 1,
 * which ratios of magnitudes do not. NaN when the whole is 0.
 */
export function shareOfTotal(part: Phasor, whole: Phasor): number {
  const square = whole.conductive ** 2 + whole.capacitive ** 2
  return square === 0 ? Number.NaN : (part.conductive * whole.conductive + part.capacitive * whole.capacitive) / square
}
