import { figure } from './words.ts'

/** A standing level this many times the step is large enough to hide most of a part that is out of phase with it. */
const LARGE = 2
const LEAST_MA = 0.2

/**
 * What a step of magnitudes may hide. A clamp reads |a + b|; from the level a and the rise r alone the part's own current
 * lies from |r| (in phase) to 2a + r (against it), and at right angles, a conductive part on a capacitive background, it
 * is √(2ar + r²). Null when that makes little difference.
 */
export function hiddenPart(levelMa: number, riseMa: number): string | null {
  if (riseMa < LEAST_MA || levelMa < LARGE * riseMa) return null
  const quadrature = Math.sqrt(2 * levelMa * riseMa + riseMa * riseMa)
  return `On a standing ${figure(levelMa)} mA magnitudes do not add: its own current is ${figure(quadrature)} mA if that is conductive and the rest capacitive, ${figure(2 * levelMa + riseMa)} mA at the very most.`
}
