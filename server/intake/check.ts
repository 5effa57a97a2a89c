import type { z } from 'zod'
import type { ProblemIssue } from '../../core/contract/index.ts'
import { pointer } from './pointer.ts'
import { Refused } from './refused.ts'

type Issue = z.core.$ZodIssue

/** The places and reasons of a failed parse; a failed union tells those of its nearest branch. */
export function issuesOf(issues: readonly Issue[], at: readonly PropertyKey[] = []): ProblemIssue[] {
  return issues.flatMap((issue): ProblemIssue[] => {
    const path = [...at, ...issue.path]
    if (issue.code === 'invalid_union' && issue.errors.length > 0) {
      const nearest = issue.errors.reduce((a, b) => (depth(b) > depth(a) ? b : a))
      return nearest.length > 0 ? issuesOf(nearest, path) : [{ path: pointer(path), why: issue.message }]
    }
    return [{ path: pointer(path), why: issue.message }]
  })
}

function depth(issues: readonly Issue[]): number {
  return Math.max(0, ...issues.map((issue) => issue.path.length))
}

/**
 * A value as its schema decodes it.
 * @param at where in the body the value stands
 * @throws {Refused} with the place of everything wrong
 */
export function check<T extends z.ZodType>(schema: T, value: unknown, at: readonly PropertyKey[] = []): z.output<T> {
  const parsed = schema.safeParse(value)
  if (parsed.success) return parsed.data
  throw new Refused('The body does not fit.', issuesOf(parsed.error.issues, at))
}
