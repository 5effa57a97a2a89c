import { describe, expect, it } from 'vitest'
import { budget } from '../../../core/findings/budget.ts'
import { seriesOf } from '../../../core/timeline/series.ts'
import { spansOf } from '../../../core/timeline/spans.ts'
import type { Timeline } from '../../../core/timeline/timeline.ts'
import { type MadeLog, switchedLog } from './switched-log.ts'
import { HOUR, loadOn, MINUTE, START, timelineOf } from './timeline-of.ts'

const LOADS = [
  { ref: 'proving-cabinet', ma: 2, onHours: 0.7, offHours: 2 },
  { ref: 'deck-oven', ma: 0.5, onHours: 1.4, offHours: 2 },
  { ref: 'mixer', ma: 0, onHours: 0.35, offHours: 1 },
]
const LOG: MadeLog = { days: 2, intervalMs: 30_000, baseMa: 8, noiseMa: 0.05, wanderMa: 0.3, loads: LOADS }

/** Readings each minute of a level that the given function of time makes. */
function logOf(timeline: Timeline, level: (t: number) => number): Timeline {
  const t = Array.from({ length: (timeline.to - timeline.from) / MINUTE }, (_, i) => timeline.from + i * MINUTE)
  return { ...timeline, leakage: seriesOf(t, t.map(level)), logged: timeline.energised }
}

function whileOn(timeline: Timeline, of: string, t: number): boolean {
  const { on } = timeline.things.find((thing) => thing.of === of)!.state
  for (let i = 0; i < on.length; i += 2) if (t >= on[i]! && t < on[i + 1]!) return true
  return false
}

describe('budget', () => {
  it('covers the truth about nine times in ten', () => {
    // 600 intervals of 90 %: 540 expected, standard deviation 7.3 if they were independent; bounds at four of those.
    let covered = 0
    for (let seed = 0; seed < 200; seed++) {
      budget(switchedLog(LOG, seed)).forEach((line, k) => {
        if (line.low! <= LOADS[k]!.ma && LOADS[k]!.ma <= line.high!) covered++
      })
    }
    expect(covered).toBeGreaterThan(510)
    expect(covered).toBeLessThan(585)
  })

  it('finds steps to a tenth of a milliamp under a wander of a third of one', () => {
    for (const [k, line] of budget(switchedLog({ ...LOG, days: 7 }, 7)).entries()) {
      expect(line.basis).toBe('switching')
      expect(Math.abs(line.ma! - LOADS[k]!.ma)).toBeLessThan(0.1)
    }
  })

  it('separates loads that are switched at the same instant now and then', () => {
    const on = (hours: readonly (readonly [number, number])[]) =>
      hours.map(([a, b]) => [START + a * HOUR, START + b * HOUR] as const)
    const to = START + 24 * HOUR
    const bare = timelineOf({
      days: 1,
      things: [
        loadOn(
          'a',
          on([
            [2, 4],
            [8, 10],
            [14, 15],
          ]),
          START,
          to,
        ),
        loadOn(
          'b',
          on([
            [2, 5],
            [8, 9],
            [18, 19],
          ]),
          START,
          to,
        ),
      ],
    })
    const lines = budget(
      logOf(bare, (t) => 6 + (whileOn(bare, 'load:a', t) ? 3 : 0) + (whileOn(bare, 'load:b', t) ? 1.25 : 0)),
    )
    expect(lines.map((l) => l.ma)).toEqual([3, 1.25])
    expect(lines.map((l) => l.switchings)).toEqual([6, 6])
  })

  it('does not judge what is always switched together, and names the other', () => {
    const to = START + 24 * HOUR
    const runs = [2, 7, 12, 17].map((h) => [START + h * HOUR, START + (h + 2) * HOUR] as const)
    const bare = timelineOf({ days: 1, things: [loadOn('oven', runs, START, to), loadOn('fan', runs, START, to)] })
    const lines = budget(logOf(bare, (t) => 6 + (whileOn(bare, 'load:oven', t) ? 3 : 0)))
    expect(lines.map((l) => [l.basis, l.ma, l.switchings])).toEqual([
      ['unjudged', null, 8],
      ['unjudged', null, 8],
    ])
    expect(lines[0]!.note).toContain('fan')
    expect(lines[1]!.note).toContain('oven')
  })

  it('does not judge what is never switched', () => {
    const bare = timelineOf({
      days: 1,
      things: [loadOn('sign', [[START, START + 24 * HOUR]], START, START + 24 * HOUR)],
    })
    expect(budget(logOf(bare, () => 6))[0]).toMatchObject({ basis: 'unjudged', ma: null, switchings: 0 })
  })

  it('gives a single switching a wide interval', () => {
    const quiet = switchedLog({ ...LOG, days: 1, loads: [] }, 3)
    const oven = loadOn('oven', [[START + 9 * HOUR, START + 24 * HOUR]], START, START + 24 * HOUR)
    const stepped = Float64Array.from(quiet.leakage!.v, (x, i) => x + (quiet.leakage!.t[i]! < START + 9 * HOUR ? 0 : 2))
    const [line] = budget({ ...quiet, things: [oven], leakage: seriesOf(quiet.leakage!.t, stepped) })
    expect(line!.switchings).toBe(1)
    expect(line!.low!).toBeLessThan(2)
    expect(line!.high!).toBeGreaterThan(2)
    expect(line!.high! - line!.low!).toBeGreaterThan(0.1)
    expect(line!.note).toMatch(/Rests on/)
  })

  it('never claims more than the clamp can', () => {
    const timeline = switchedLog({ ...LOG, noiseMa: 0, wanderMa: 0 }, 1)
    const accurate = {
      ...timeline,
      sheet: {
        ...timeline.sheet,
        channels: [
          {
            ref: 'tails',
            quantity: 'leakage' as const,
            rcd: 'A',
            accuracy: { percent: 2, digits: 5 },
            resolutionMa: 0.01,
          },
        ],
      },
    }
    const [line] = budget(accurate)
    // 2 % of 2 mA as an even spread within ±0.04 mA: standard uncertainty 0.04/√3 (JCGM 100:2008, 4.3.7), times 1.645 for
    // 90 %, both ways. The digits are an offset, which cancels in a difference.
    expect(line!.high! - line!.low!).toBeGreaterThanOrEqual((2 * 1.645 * 0.04) / Math.sqrt(3))
  })

  it('scales with the readings', () => {
    const timeline = switchedLog(LOG, 11)
    const twice = {
      ...timeline,
      leakage: seriesOf(
        timeline.leakage!.t,
        timeline.leakage!.v.map((x) => 2 * x),
      ),
    }
    const one = budget(timeline)
    budget(twice).forEach((line, k) => {
      for (const key of ['ma', 'low', 'high'] as const) expect(line[key]).toBeCloseTo(2 * one[k]![key]!, 4)
    })
  })

  it('gives the same figures when a circuit that never changes is added', () => {
    const timeline = switchedLog(LOG, 5)
    const idle = loadOn('idle', [], timeline.from, timeline.to)
    expect(budget({ ...timeline, things: [idle, ...timeline.things] }).slice(1)).toEqual(budget(timeline))
  })

  it('lets a watch be minutes off the clock of the logger', () => {
    const to = START + 24 * HOUR
    const off = [START + 8 * HOUR, START + 14 * HOUR] as const
    // noted six minutes late; a kettle runs shortly before and cuts the level into short pieces
    const circuit = {
      ...loadOn(
        '1',
        [
          [START, off[0] + 6 * MINUTE],
          [off[1] + 6 * MINUTE, to],
        ],
        START,
        to,
      ),
      of: 'circuit:1',
      kind: 'circuit' as const,
      source: 'switching' as const,
    }
    const boils = [1, 3, 5, 7.98, 8.04, 10, 12, 13.98, 14.04, 17, 20].map(
      (h) => [START + h * HOUR, START + h * HOUR + 3 * MINUTE] as const,
    )
    const kettle = { ...loadOn('kettle', boils, START, to), circuit: '2' }
    const bare = timelineOf({ days: 1, things: [circuit, kettle] })
    const log = logOf(bare, (t) => 6 + (t >= off[0] && t < off[1] ? 0 : 3) + (whileOn(bare, 'load:kettle', t) ? 1 : 0))
    const [line] = budget(log)
    expect(line!.ma).toBeCloseTo(3, 6)
  })

  it('reads a clamp survey: everything on, then one after another off', () => {
    const timeline = timelineOf({
      days: 1,
      things: ['a', 'b'].map((ref) => ({ ...loadOn(ref, [], START, START + 24 * HOUR) })),
      tests: [
        { id: '1', kind: 'clamp', rcd: 'A', ma: 9.8, off: [], at: START },
        { id: '2', kind: 'clamp', rcd: 'A', ma: 7.3, off: ['load:a'], at: START + 5 * MINUTE },
        { id: '3', kind: 'clamp', rcd: 'A', ma: 6.9, off: ['load:a', 'load:b'], at: START + 9 * MINUTE },
        // Another visit: the rest may have changed.
        { id: '4', kind: 'clamp', rcd: 'A', ma: 2, off: ['load:b'], at: START + 9 * HOUR },
      ],
    })
    const lines = budget(timeline)
    expect(lines.map((l) => l.basis)).toEqual(['survey', 'survey'])
    expect(lines[0]!.ma).toBeCloseTo(2.5, 9)
    expect(lines[1]!.ma).toBeCloseTo(0.4, 9)
    expect(lines[0]!.low!).toBeLessThan(2.5)
  })

  it('takes a circuit with its own clamp by that clamp', () => {
    const own = seriesOf(
      Array.from({ length: 1_440 }, (_, i) => START + i * MINUTE),
      Array.from({ length: 1_440 }, () => 3.4),
    )
    const thing = { ...loadOn('a', [[START, START + 24 * HOUR]], START, START + 24 * HOUR), leakage: own }
    const [line] = budget(timelineOf({ days: 1, things: [thing], logged: spansOf([]) }))
    expect(line).toMatchObject({ basis: 'channel', ma: 3.4 })
  })

  it('warns that a small rise on a large standing level may hide a larger part', () => {
    const to = START + 24 * HOUR
    const runs = [2, 7, 12, 17].map((h) => [START + h * HOUR, START + (h + 2) * HOUR] as const)
    const bare = timelineOf({ days: 1, things: [loadOn('heater', runs, START, to)] })
    // domain.md: 5 mA conductive on 12 mA capacitive reads 13 mA, a rise of 1 mA.
    const [line] = budget(logOf(bare, (t) => (whileOn(bare, 'load:heater', t) ? Math.hypot(5, 12) : 12)))
    expect(line!.ma).toBeCloseTo(1, 6)
    expect(line!.note).toMatch(/standing 12 mA .* 5 mA if that is conductive/)
  })
})
