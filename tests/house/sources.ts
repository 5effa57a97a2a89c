import { readdirSync, readFileSync, statSync } from 'node:fs'
import { join, relative } from 'node:path'
import { fileURLToPath } from 'node:url'

export const ROOT = fileURLToPath(new URL('../..', import.meta.url))

/** A source file, read three ways with the same length and lines, so that a place found in one is the place in all. */
export interface Source {
  /** Name below the project's folder, with forward slashes. */
  readonly name: string
  readonly text: string
  /** Without what comments say. */
  readonly code: string
  /** Without what comments and strings say. */
  readonly bare: string
}

/** Reads every TypeScript and JavaScript file in some folders of the project. */
export function sourcesIn(...folders: readonly string[]): Source[] {
  return filesIn(folders)
    .filter((name) => /\.(ts|tsx|mjs)$/.test(name))
    .map((name) => sourceOf(name, readFileSync(join(ROOT, name), 'utf8')))
}

/** Names of all files in some folders of the project, sorted; a folder that is not there has none. */
export function filesIn(folders: readonly string[]): string[] {
  const walk = (path: string): string[] => {
    const about = statSync(path, { throwIfNoEntry: false })
    if (about === undefined) return []
    if (!about.isDirectory()) return [relative(ROOT, path).replaceAll('\\', '/')]
    return readdirSync(path)
      .sort()
      .filter((entry) => entry !== 'node_modules' && entry !== 'dist')
      .flatMap((entry) => walk(join(path, entry)))
  }
  return folders.flatMap((folder) => walk(join(ROOT, folder)))
}

export function sourceOf(name: string, text: string): Source {
  return { name, text, ...blank(text) }
}

/** Every match of a pattern in code, as "file:line: what". The pattern needs the flag `g`. */
export function findings(source: Source, view: 'text' | 'code' | 'bare', pattern: RegExp): string[] {
  return [...source[view].matchAll(pattern)].map(
    (match) => `${source.name}:${lineOf(source.text, match.index)}: ${match[0].trim().split('\n')[0]}`,
  )
}

export function lineOf(text: string, index: number): number {
  return text.slice(0, index).split('\n').length
}

/** Comments, strings, templates and regular expressions; whichever begins first swallows the others. */
const PIECES = new RegExp(
  [
    String.raw`(?<comment>\/\/[^\n]*|\/\*[\s\S]*?\*\/)`,
    String.raw`(?<string>'(?:\\.|[^'\\\n])*'|"(?:\\.|[^"\\\n])*"|\x60(?:\\[\s\S]|[^\x60\\])*\x60)`,
    String.raw`(?<=[(,=:[!&|?{};>\n]\s*|return\s+)(?<regex>\/(?:\\.|\[(?:\\.|[^\]\\\n])*\]|[^\/\\\n[*])(?:\\.|\[(?:\\.|[^\]\\\n])*\]|[^\/\\\n[])*\/[dgimsuvy]*)`,
  ].join('|'),
  'g',
)

function blank(text: string): { code: string; bare: string } {
  const spaces = (piece: string): string => piece.replace(/[^\n]/g, ' ')
  const code = text.replace(PIECES, (piece, comment: string | undefined) => (comment ? spaces(piece) : piece))
  const bare = text.replace(PIECES, (piece, comment: string | undefined) =>
    comment ? spaces(piece) : piece[0] + spaces(piece.slice(1, -1)) + piece.at(-1),
  )
  return { code, bare }
}
