import { median } from '../statistics/median.ts'
import type { Timeline } from '../timeline/timeline.ts'

/** Readings of one visit belong together: within two hours the rest of the installation is taken as unchanged. */
const VISIT_MS = 2 * 3_600_000
/** A hand clamp where the sheet names no better: ±(2 % of the difference + 0.1 mA); common practice, no source. */
const SHARE = 0.02
const FIXED_MA = 0.1

/** What a clamp survey says of one circuit or load, mA. */
export interface SurveyFigure {
  readonly ma: number
  /** Half-width of the interval. */
  readonly half: number
  readonly pairs: number
}

interface Reading {
  readonly at: number
  readonly ma: number
  readonly off: ReadonlySet<string>
}

/**
 * Clamp surveys: two readings of one visit whose lists of what was off differ by one thing give that thing's figure,
 * everything on against one off as well as everything off against one on. Of several pairs the median, its interval at
 * least as wide as their spread. By reference.
 */
export function surveyFigures(timeline: Timeline): Map<string, SurveyFigure> {
  const readings = readingsOf(timeline)
  const found = new Map<string, number[]>()
  for (let i = 0; i < readings.length; i++) {
    for (let j = i + 1; j < readings.length && readings[j]!.at - readings[i]!.at <= VISIT_MS; j++) {
      const pair = differByOne(readings[i]!, readings[j]!)
      if (pair === null) continue
      found.set(pair.of, [...(found.get(pair.of) ?? []), pair.ma])
    }
  }
  const figures = new Map<string, SurveyFigure>()
  for (const [of, values] of found) {
    const ma = median(values)
    const spread = values.length < 2 ? 0 : Math.max(...values.map((v) => Math.abs(v - ma)))
    figures.set(of, { ma, half: Math.max(SHARE * Math.abs(ma) + FIXED_MA, spread), pairs: values.length })
  }
  return figures
}

/** Clamp readings of this device by time; a load on a circuit that is off needs no word of its own. */
function readingsOf(timeline: Timeline): Reading[] {
  const circuitOf = new Map(timeline.things.filter((t) => t.kind === 'load').map((t) => [t.of, `circuit:${t.circuit}`]))
  const list: Reading[] = []
  for (const test of timeline.tests) {
    if (test.kind !== 'clamp' || test.rcd !== timeline.rcd.ref) continue
    const named = new Set<string>(test.off)
    list.push({
      at: test.at,
      ma: test.ma,
      off: new Set([...named].filter((of) => !named.has(circuitOf.get(of) ?? ''))),
    })
  }
  return list.sort((a, b) => a.at - b.at)
}

function differByOne(a: Reading, b: Reading): { of: string; ma: number } | null {
  const onlyA = [...a.off].filter((of) => !b.off.has(of))
  const onlyB = [...b.off].filter((of) => !a.off.has(of))
  if (onlyA.length + onlyB.length !== 1) return null
  return onlyB.length === 1 ? { of: onlyB[0]!, ma: a.ma - b.ma } : { of: onlyA[0]!, ma: b.ma - a.ma }
}
