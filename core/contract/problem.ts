import { z } from 'zod'

/** The most issues one problem lists. */
export const MAX_ISSUES = 20

/** One thing wrong with a body, with its place as a JSON pointer (RFC 6901). */
export const ProblemIssue = z.object({ path: z.string(), why: z.string() })

/** RFC 9457 problem details, the one shape of every refusal. */
export const Problem = z
  .looseObject({
    type: z.string(),
    title: z.string(),
    status: z.int(),
    detail: z.string(),
    issues: z.array(ProblemIssue).optional(),
  })
  .meta({ description: 'RFC 9457 problem details; "detail" says what was kept' })

export type ProblemIssue = z.infer<typeof ProblemIssue>
export type Problem = z.infer<typeof Problem>
