/** What went wrong in core, by code; tests and callers look at the code, people read the message. */
export type CoreErrorCode =
  | 'too_few_values'
  | 'not_finite'
  | 'zero_spread'
  | 'unequal_lengths'
  | 'not_ascending'
  | 'out_of_range'
  | 'no_convergence'
  | 'singular'
  | 'unknown_time_zone'
  | 'unknown_reference'
  | 'corrupt_data'
  | 'contradiction'

/** The one error core throws: a broken precondition, named by code. A gap is never an error (it is NaN in a Series). */
export class CoreError extends Error {
  readonly code: CoreErrorCode

  constructor(code: CoreErrorCode, message: string) {
    super(message)
    this.name = 'CoreError'
    this.code = code
  }
}
