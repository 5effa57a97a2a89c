import type { Findings, Headroom, InsulationLine } from '../contract/findings.ts'
import type { InsulationTest } from '../contract/records.ts'
import type { Thing, Timeline } from '../timeline/timeline.ts'
import {
  conductionMa,
  INVESTIGATE_BELOW_MEGOHMS,
  type Insulation,
  leastInsulation,
  parallelInsulation,
} from '../trade/insulation.ts'
import { current, figure, rounded } from './words.ts'

type InsulationFindings = NonNullable<Findings['insulation']>

/** Where the sheet does not name the supply's voltage: IEC 60038 (from memory). */
const USUAL_VOLTS = 230

/** The tests that speak for one thing. */
interface Tested {
  readonly thing: Thing
  readonly insulation: Insulation
  readonly surgeParts: boolean
  /** Whether the loads that hang on the circuit were part of it. */
  readonly withLoads: boolean
}

/**
 * Insulation tests turned into currents (domain.md, Formulas): U/R of each thing at the supply's voltage, the resultant of all in
 * parallel, what it would be without each, and how much of the standing leakage it explains. Insulation shows the conductive part alone;
 * most standing leakage is capacitive and no such test shows it. Readings at full scale are bounds; a reading with surge-protective
 * parts connected is flagged and left out, for those conduct at the test voltage. Of several tests of a thing the latest. Null without a test.
 */
export function insulation(timeline: Timeline, headroom: Headroom): InsulationFindings | null {
  const tested = latestTests(timeline)
  if (tested.length === 0) return null
  const volts = timeline.sheet.supply?.volts ?? USUAL_VOLTS
  const least = leastInsulation(volts).megohms
  const usable = withoutRiders(tested.filter(({ surgeParts }) => !surgeParts))
  const standing = headroom.standingMa?.p50 ?? null
  const lines = tested.map((one) => lineOf(one, tested, usable, volts, least))
  const untested = timeline.things
    .filter(({ kind, of }) => kind === 'circuit' && !usable.some(({ thing }) => thing.of === of))
    .map(({ of }) => of)
  if (usable.length === 0) {
    return {
      volts,
      resultantMegohms: 0,
      atLeast: true,
      ma: null,
      standingMa: standing,
      explainedShare: null,
      capacitiveMa: null,
      untested,
      lines,
      text: 'Every insulation test was taken with surge-protective parts connected: none of them can be used. Unplug those parts and test again.',
    }
  }
  const all = parallelInsulation(usable.map((one) => one.insulation))
  const ma = all.megohms > 0 ? conductionMa(volts, all.megohms) : null
  const explained = ma === null || standing === null || standing <= 0 ? null : Math.min(1, ma / standing)
  const rest = ma === null || standing === null || ma >= standing ? null : Math.sqrt(standing ** 2 - ma ** 2)
  return {
    volts,
    resultantMegohms: rounded(all.megohms),
    atLeast: all.atLeast,
    ma: ma === null ? null : rounded(ma),
    standingMa: standing,
    explainedShare: explained === null ? null : rounded(explained),
    capacitiveMa: rest === null ? null : rounded(rest),
    untested,
    lines,
    text: textOf(all, ma, standing, rest, untested.length),
  }
}

/** Of every thing its latest tests to earth; line and neutral tested apart count in parallel, as they leak. */
function latestTests({ tests, things }: Timeline): Tested[] {
  return things.flatMap((thing): Tested[] => {
    const own = tests.filter(
      (test): test is typeof test & InsulationTest =>
        test.kind === 'insulation' && test.of === thing.of && test.between !== 'line-neutral',
    )
    const latest = new Map<string, (typeof own)[number]>()
    for (const test of own) {
      const before = latest.get(test.between)
      if (before === undefined || test.at >= before.at) latest.set(test.between, test)
    }
    const both = latest.get('live-earth')
    const apart = [latest.get('line-earth'), latest.get('neutral-earth')].filter((test) => test !== undefined)
    const newest = Math.max(...apart.map(({ at }) => at))
    const chosen = both !== undefined && (apart.length === 0 || both.at >= newest) ? [both] : apart
    if (chosen.length === 0) return []
    return [
      {
        thing,
        insulation: parallelInsulation(chosen),
        surgeParts: chosen.some((test) => test.surgePartsConnected),
        withLoads: chosen.some((test) => test.loadsConnected),
      },
    ]
  })
}

/** Without loads that were part of their circuit's test already. */
function withoutRiders(tested: readonly Tested[]): readonly Tested[] {
  const whole = new Set(
    tested.filter(({ thing, withLoads }) => thing.kind === 'circuit' && withLoads).map(({ thing }) => thing.circuit),
  )
  return tested.filter(({ thing }) => thing.kind === 'circuit' || !whole.has(thing.circuit))
}

function lineOf(
  one: Tested,
  tested: readonly Tested[],
  usable: readonly Tested[],
  volts: number,
  least: number,
): InsulationLine {
  const { megohms, atLeast } = one.insulation
  const others = usable.filter(({ thing }) => thing.of !== one.thing.of && !isPartOf(thing, one, tested))
  const without = others.length === 0 ? null : parallelInsulation(others.map((other) => other.insulation)).megohms
  const ma = megohms > 0 ? conductionMa(volts, megohms) : null
  const flag: InsulationLine['flag'] = one.surgeParts
    ? 'surge-parts'
    : megohms < least && !atLeast
      ? 'below-limit'
      : megohms < INVESTIGATE_BELOW_MEGOHMS && !atLeast
        ? 'investigate'
        : 'sound'
  return {
    of: one.thing.of,
    megohms: rounded(megohms),
    atLeast,
    ma: ma === null ? null : rounded(ma),
    withoutMegohms: without === null ? null : rounded(without),
    flag,
    text: lineText(one, flag, ma, least),
  }
}

/** A load on a circuit that was tested with its loads goes with that circuit. */
function isPartOf(thing: Thing, one: Tested, tested: readonly Tested[]): boolean {
  return thing.kind === 'load' && tested.includes(one) && one.withLoads && one.thing.of === `circuit:${thing.circuit}`
}

function lineText(
  { thing, insulation: { megohms, atLeast } }: Tested,
  flag: InsulationLine['flag'],
  ma: number | null,
  least: number,
): string {
  const reads = `${thing.label}: ${atLeast ? 'at least ' : ''}${figure(megohms)} MΩ`
  const flows = ma === null ? 'a dead short' : `${atLeast ? 'at most ' : ''}${current(ma)} mA`
  switch (flag) {
    case 'surge-parts':
      return `${reads} with surge-protective parts connected: those conduct at the test voltage, so it says nothing. Unplug them and test again.`
    case 'below-limit':
      return `${reads}, ${flows}: below the least of ${figure(least)} MΩ (BS 7671 table 64, IEC 60364-6 table 6.1, from memory).`
    case 'investigate':
      return `${reads}, ${flows}: above the least value, but most electricians investigate below ${figure(INVESTIGATE_BELOW_MEGOHMS)} MΩ.`
    case 'sound':
      return `${reads}, ${flows}.`
    default:
      return flag satisfies never
  }
}

function textOf(
  all: Insulation,
  ma: number | null,
  standing: number | null,
  rest: number | null,
  untested: number,
): string {
  const bound = all.atLeast ? 'at least ' : ''
  const most = all.atLeast ? 'at most ' : ''
  const together =
    ma === null
      ? 'The tests show a dead short to earth.'
      : `What was tested insulates by ${bound}${figure(all.megohms)} MΩ together, which lets ${most}${current(ma)} mA through.`
  const against =
    standing === null || rest === null
      ? ''
      : ` The standing leakage is ${current(standing)} mA: the other ${current(rest)} mA, at right angles to it, are capacitive or on what was not tested, and no insulation test shows them.`
  const missing =
    untested === 0 ? '' : ` ${untested === 1 ? 'One circuit has' : `${untested} circuits have`} no usable test.`
  return `${together}${against}${missing}`
}
