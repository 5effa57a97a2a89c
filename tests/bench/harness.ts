import { readFileSync } from 'node:fs'
import { cpus, release, totalmem, type } from 'node:os'
import { fileURLToPath } from 'node:url'

/** One figure of a benchmark. */
export interface Measure {
  /** What was measured, with its load: "append, 10,000 readings a transaction". */
  readonly what: string
  readonly value: number
  /** "readings/s", "ms", "MB", "×". */
  readonly unit: string
  /** What is aimed at, in words: "≥ 0.8", "< 25 ms". Shown, never judged. */
  readonly target?: string
}

/** What every module in this folder exports. Each runs in a process of its own. */
export interface Bench {
  readonly name: string
  run(): Promise<readonly Measure[]>
}

/** The middle value of an odd number of runs, the mean of the middle two of an even one. */
export function median(values: readonly number[]): number {
  const sorted = values.toSorted((a, b) => a - b)
  const upper = sorted.length >> 1
  return sorted.length % 2 === 1 ? sorted[upper]! : (sorted[upper - 1]! + sorted[upper]!) / 2
}

/** Figures without their machine and versions mean nothing: this stands above every table. */
export function circumstances(): string {
  const processor = cpus()[0]?.model.trim() || 'unnamed processor'
  const memory = `${Math.round(totalmem() / 2 ** 30)} GiB`
  const versions = ['better-sqlite3', 'fastify', 'zod', 'uplot'].map((name) => `${name} ${versionOf(name)}`)
  return [
    `${new Date().toISOString()}  ${cpus().length} × ${processor}, ${memory}, ${type()} ${release()}`,
    `Node.js ${process.versions.node}, ${versions.join(', ')}`,
  ].join('\n')
}

function versionOf(name: string): string {
  const file = fileURLToPath(new URL(`../../node_modules/${name}/package.json`, import.meta.url))
  return (JSON.parse(readFileSync(file, 'utf8')) as { version: string }).version
}

/** Measures as lines of aligned columns: what, value, unit, target. */
export function table(measures: readonly Measure[]): string {
  const rows = measures.map(({ what, value, unit, target }) => [what, figure(value), unit, target ?? ''] as const)
  const width = (column: 0 | 1 | 2): number => Math.max(0, ...rows.map((row) => row[column].length))
  return rows
    .map(([what, value, unit, target]) =>
      `  ${what.padEnd(width(0))}  ${value.padStart(width(1))} ${unit.padEnd(width(2))}  ${target && `aim ${target}`}`.trimEnd(),
    )
    .join('\n')
}

/** Three figures of a small number, thousands apart in a large one. */
function figure(value: number): string {
  if (!Number.isFinite(value)) return String(value)
  const digits = Math.abs(value) >= 100 ? 0 : Math.abs(value) >= 10 ? 1 : 2
  return value.toLocaleString('en', { minimumFractionDigits: digits, maximumFractionDigits: digits })
}
