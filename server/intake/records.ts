import type { z } from 'zod'
import {
  type RecordBodies,
  type RecordKind,
  RemedyIn,
  type SiteSheet,
  SwitchingIn,
  TestIn,
  TimetableIn,
  TripIn,
} from '../../core/contract/index.ts'
import { check, issuesOf } from './check.ts'
import { dangling } from './references.ts'
import { Refused } from './refused.ts'

/** The most records one body may carry. */
export const MAX_RECORDS_PER_BODY = 10_000

/** The schema of each kind as a client writes it. */
export const RECORD_IN = {
  trip: TripIn,
  switching: SwitchingIn,
  timetable: TimetableIn,
  test: TestIn,
  remedy: RemedyIn,
} as const satisfies Record<RecordKind, z.ZodType>

/**
 * Reads one record, a list of them, or `{ "changes": […] }` for switchings.
 * @throws {Refused} with the place of everything that does not fit or names what the sheet does not have
 */
export function takeRecords<K extends RecordKind>(kind: K, body: unknown, sheet: SiteSheet): RecordBodies[K][] {
  const { list, at } = listOf(kind, body)
  if (list.length > MAX_RECORDS_PER_BODY) {
    throw new Refused(`A body carries at most ${MAX_RECORDS_PER_BODY} records; post it in parts.`, [], {
      kind: 'too-large',
    })
  }
  const schema = RECORD_IN[kind]
  const parsed = list.map((item) => schema.safeParse(item))
  const issues = parsed.flatMap((one, i) =>
    one.success
      ? dangling(one.data as RecordBodies[K], sheet, at(i))
      : issuesOf(one.error.issues as z.core.$ZodIssue[], at(i)),
  )
  if (issues.length > 0) throw new Refused('The body does not fit.', issues)
  return parsed.map((one) => one.data as RecordBodies[K])
}

/**
 * A stored record with a change merged over it (RFC 7396: null takes a field away), checked as a whole.
 * @throws {Refused} when the change, or what it makes of the record, does not fit
 */
export function changedRecord<K extends RecordKind>(
  kind: K,
  stored: RecordBodies[K],
  change: unknown,
  sheet: SiteSheet,
): RecordBodies[K] {
  if (!isPlain(change)) throw new Refused('A change is an object with the fields to change.', [])
  const merged = Object.entries({ ...stored, ...change }).filter(([, value]) => value !== null)
  const body = check(RECORD_IN[kind], Object.fromEntries(merged)) as RecordBodies[K]
  const issues = dangling(body, sheet, [])
  if (issues.length > 0) throw new Refused('The change does not fit.', issues)
  return body
}

interface Listed {
  readonly list: readonly unknown[]
  /** Where the i-th item stands in the body. */
  readonly at: (i: number) => readonly PropertyKey[]
}

function listOf(kind: RecordKind, body: unknown): Listed {
  if (Array.isArray(body)) return { list: body, at: (i) => [i] }
  if (!isPlain(body)) throw new Refused('The body is one object or a list of them.', [])
  if (kind === 'switching' && 'changes' in body) {
    if (Array.isArray(body.changes)) return { list: body.changes, at: (i) => ['changes', i] }
    throw new Refused('The body does not fit.', [{ path: '/changes', why: 'must be a list' }])
  }
  return { list: [body], at: () => [] }
}

function isPlain(value: unknown): value is Readonly<Record<string, unknown>> {
  return typeof value === 'object' && value !== null && !Array.isArray(value)
}
