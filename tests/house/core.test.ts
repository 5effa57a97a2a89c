import { describe, expect, it } from 'vitest'
import { findings, type Source, sourceOf, sourcesIn } from './sources.ts'

const core = sourcesIn('core')

/** What would make the same inputs give other findings on another machine, day or run. */
const IMPURE =
  /\bDate\.now\b|\bMath\.random\b|\bconsole\b|\bnew Date\(\s*\)|(?<!new )\bDate\(\s*\)|\bperformance\.|\bprocess\.|\bglobalThis\b|\bcrypto\.|\bset(?:Timeout|Interval|Immediate)\b|\bfetch\(|\blocaleCompare\b|\btoLocale\w+|\bTemporal\.Now\b|\.get(?:Hours|Minutes|Day|Date|Month|FullYear|TimezoneOffset)\(/g

/** Exported functions, also those written as constants. */
const EXPORTED = /^export (?:async )?function\*? (\w+)|^export const (\w+)[^=\n]*= (?:async )?(?:<[^>]*>)?\([^\n]*=>/gm

function undocumented(source: Source): string[] {
  const seen = new Set<string>()
  return [...source.bare.matchAll(EXPORTED)].flatMap((match) => {
    const name = match[1] ?? match[2] ?? ''
    const overload = seen.has(name)
    seen.add(name)
    if (overload || source.text.slice(0, match.index).trimEnd().endsWith('*/')) return []
    return [`${source.name}: ${name} has no doc comment`]
  })
}

describe('core', () => {
  it('has no clock, chance, output, locale or time zone of the machine', () => {
    expect(core.flatMap((source) => findings(source, 'bare', IMPURE))).toEqual([])
  })

  it('says before every exported function what it does', () => {
    expect(core.flatMap(undocumented)).toEqual([])
  })

  it('is read by a check that finds planted faults and no others', () => {
    const text = [
      '// Date.now() in a comment is fine',
      "const said = 'Math.random() in a string too'",
      'const matched = /console/g',
      'export function bare(): number {',
      '  return Date.now() + new Date(5).getTime() + Number(new Date())',
      '}',
      '/** Told. */',
      'export function told(): void {}',
    ].join('\n')
    const planted = sourceOf('core/planted.ts', text)
    expect(findings(planted, 'bare', IMPURE)).toEqual(['core/planted.ts:5: Date.now', 'core/planted.ts:5: new Date()'])
    expect(undocumented(planted)).toEqual(['core/planted.ts: bare has no doc comment'])
  })
})
