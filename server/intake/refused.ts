import { MAX_ISSUES, type ProblemIssue, type RefusedReading } from '../../core/contract/index.ts'

/** What of a body could not be read: `unreadable` (400), `refused` (422) or `too-large` (413). */
export type RefusalKind = 'unreadable' | 'refused' | 'too-large'

/** Why a body was not taken as a whole; nothing of it was stored. At most MAX_ISSUES places are kept. */
export class Refused extends Error {
  readonly kind: RefusalKind
  readonly issues: readonly ProblemIssue[]
  /** The readings that were refused one by one, when that is why nothing was left. */
  readonly readings: readonly RefusedReading[]

  constructor(
    message: string,
    issues: readonly ProblemIssue[] = [],
    options: { readonly kind?: RefusalKind; readonly readings?: readonly RefusedReading[] } = {},
  ) {
    super(message)
    this.name = 'Refused'
    this.kind = options.kind ?? 'refused'
    this.issues = issues.slice(0, MAX_ISSUES)
    this.readings = options.readings ?? []
  }
}
