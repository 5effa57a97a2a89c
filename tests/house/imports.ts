import { posix } from 'node:path'
import { lineOf, type Source } from './sources.ts'

export interface Import {
  readonly file: string
  readonly line: number
  /** A path below the project's folder for a file, the bare name (`zod`, `node:fs`) for a package. */
  readonly target: string
}

/** Every import, re-export and dynamic import of a file, and every worker that it names by `new URL(…, import.meta.url)`. */
export function importsOf(source: Source): Import[] {
  const patterns = [
    /^[ \t]*(?:import|export)\b[^'"`;()=]*?\bfrom\s*(['"])(?<to>[^'"\n]+)\1/gm,
    /(?<![-\w.])import\s*\(?\s*(['"])(?<to>[^'"\n]+)\1/g,
    /\bnew URL\(\s*(['"])(?<to>\.[^'"\n]+\.[jt]sx?)\1\s*,\s*import\.meta\.url/g,
  ]
  return patterns
    .flatMap((pattern) => [...source.code.matchAll(pattern)])
    .map((match) => {
      const to = match.groups?.to ?? ''
      return {
        file: source.name,
        line: lineOf(source.text, match.index),
        target: to.startsWith('.') ? posix.join(posix.dirname(source.name), to) : to,
      }
    })
}

/** What one folder may import. A name ending in `/` stands for all below it, one ending in `*` for all that begin so. */
export interface Room {
  readonly folder: string
  readonly may: readonly string[]
  readonly never?: readonly string[]
}

/** The room of a file: the last one in the list whose folder holds it. */
export function roomOf(rooms: readonly Room[], file: string): Room | undefined {
  return rooms.findLast((room) => covers(room.folder, file))
}

/** Why an import is against the table, or undefined. */
export function whyNot(rooms: readonly Room[], found: Import): string | undefined {
  const room = roomOf(rooms, found.file)
  const where = `${found.file}:${found.line}`
  if (room === undefined) return `${where} lies in no room of the table`
  const allowed = room.may.some((name) => covers(name, found.target))
  const denied = (room.never ?? []).some((name) => covers(name, found.target))
  return allowed && !denied ? undefined : `${where} (${room.folder}) must not import ${found.target}`
}

function covers(name: string, target: string): boolean {
  if (name.endsWith('*')) return target.startsWith(name.slice(0, -1))
  if (name.endsWith('/')) return target.startsWith(name)
  return target === name || target.startsWith(`${name}/`)
}
