import { CoreError } from '../errors.ts'

/** An insulation resistance, MΩ: a value, or, where the meter was at full scale, only "at least". */
export interface Insulation {
  readonly megohms: number
  readonly atLeast: boolean
}

/** Level below which most electricians investigate, MΩ. Common practice. */
export const INVESTIGATE_BELOW_MEGOHMS = 2

/**
 * Resultant of insulation resistances in parallel, R = 1 / Σ(1/R_i). A reading at full scale gives only a lower bound,
 * and so does every resultant it enters. Resistances in MΩ; 0 is a dead short.
 * @throws {CoreError} too_few_values (none), out_of_range (negative or not finite)
 */
export function parallelInsulation(parts: readonly Insulation[]): Insulation {
  if (parts.length === 0) throw new CoreError('too_few_values', 'parallelInsulation needs 1 resistance, got 0')
  let conductance = 0
  let atLeast = false
  for (const part of parts) {
    if (!(part.megohms >= 0 && Number.isFinite(part.megohms)))
      throw new CoreError('out_of_range', `parallelInsulation got ${part.megohms} MΩ`)
    conductance += 1 / part.megohms
    atLeast ||= part.atLeast
  }
  return { megohms: 1 / conductance, atLeast: atLeast && Number.isFinite(conductance) }
}

/** Conduction current of an insulation resistance, mA: I = U/R; an upper bound where the resistance is "at least". */
export function conductionMa(volts: number, megohms: number): number {
  return volts / megohms / 1_000
}

/** Least insulation resistance a circuit must have, MΩ, and the d.c. voltage it is tested at. */
export interface LeastInsulation {
  readonly megohms: number
  readonly testVolts: number
}

/**
 * Least insulation resistance by nominal voltage: SELV and PELV 0.5 MΩ at 250 V; up to and including 500 V 1 MΩ at
 * 500 V; above 1 MΩ at 1000 V. BS 7671 table 64, IEC 60364-6 table 6.1 (from memory).
 */
export function leastInsulation(nominalVolts: number, extraLow = false): LeastInsulation {
  if (extraLow) return { megohms: 0.5, testVolts: 250 }
  return nominalVolts <= 500 ? { megohms: 1, testVolts: 500 } : { megohms: 1, testVolts: 1_000 }
}
