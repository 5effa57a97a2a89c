import { describe, expect, it } from 'vitest'
import { Findings } from '../../../core/contract/index.ts'
import { findings } from '../../../core/findings/findings.ts'
import { SCENARIOS } from '../../../core/simulate/scenarios/scenarios.ts'
import { evidenceOf } from '../../../core/simulate/simulated.ts'

/** Kinds that lack something: a log, trips, times, or a cause. */
const KINDS = ['diary-only', 'three-trips', 'rain-lag', 'nothing', 'shared-surge'] as const

describe.each(KINDS)('the whole answer of a site of kind %s', (kind) => {
  const evidence = evidenceOf(SCENARIOS[kind]!(11))
  const found = findings(evidence)

  it('keeps to the contract, with every part in words', () => {
    const sent = JSON.parse(JSON.stringify(found))
    expect(Findings.parse(sent)).toEqual(sent)
    const texts = [
      ...found.suspects.flatMap((s) => s.because.map((b) => b.text)),
      ...found.next.map((n) => n.text),
      ...found.trips.map((t) => t.text),
      found.proof.text,
      found.epochs!.text,
      found.spread!.text,
    ]
    for (const text of texts) expect(text).toMatch(/^[^a-z].*\.$/)
    expect(texts.filter((text) => /NaN|undefined|Infinity|null/.test(text))).toEqual([])
  })

  it('gives each suspect two to four reasons with method and figures', () => {
    for (const { because } of found.suspects) {
      expect(because.length).toBeGreaterThanOrEqual(2)
      expect(because.length).toBeLessThanOrEqual(4)
      for (const { method, figures } of because) {
        expect(method).not.toBe('')
        expect(Object.keys(figures).length).toBeGreaterThan(0)
      }
    }
  })

  it('proposes at most three isolations, each once, and never one without odds', () => {
    const isolations = found.next.filter((n) => n.isolate !== null)
    expect(isolations.length).toBeLessThanOrEqual(3)
    expect(new Set(found.next.map((n) => n.text)).size).toBe(found.next.length)
    for (const { days, settles } of isolations) {
      expect(days).toBeGreaterThanOrEqual(1)
      expect(settles).toBeGreaterThanOrEqual(0.5)
    }
  })

  it('keeps the epochs small', () => {
    expect(found.epochs!.minutes.length).toBeLessThanOrEqual(120)
    for (const column of [found.epochs!.ma, found.epochs!.low, found.epochs!.high])
      expect(column).toHaveLength(found.epochs!.minutes.length)
  })
})
