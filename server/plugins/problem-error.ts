import type { ProblemIssue } from '../../core/contract/index.ts'

/** The kinds of problem: each has a type URI, a title and a status. */
export const PROBLEMS = {
  'malformed-request': [400, 'Malformed request'],
  'key-required': [401, 'A key is required'],
  'unknown-key': [401, 'This key is not known'],
  'not-permitted': [403, 'This key may not do that'],
  'forgery-suspected': [403, 'The call may not come from the page'],
  'not-found': [404, 'Not found'],
  'method-not-allowed': [405, 'Method not allowed'],
  'not-acceptable': [406, 'Not acceptable'],
  conflict: [409, 'Conflict'],
  'too-large': [413, 'Too large'],
  'address-too-long': [414, 'Address too long'],
  'unsupported-media-type': [415, 'Unsupported media type'],
  'refused-body': [422, 'Refused'],
  'too-many-requests': [429, 'Too many requests'],
  'headers-too-large': [431, 'Headers too large'],
  'server-error': [500, 'Server error'],
  'shutting-down': [503, 'Shutting down'],
  'disk-full': [503, 'Disk full'],
  busy: [503, 'Busy'],
} as const satisfies Record<string, readonly [number, string]>

export type ProblemKind = keyof typeof PROBLEMS

export interface ProblemMore {
  readonly issues?: readonly ProblemIssue[]
  readonly headers?: Readonly<Record<string, string>>
  /** Further members of the document. */
  readonly extra?: Readonly<Record<string, unknown>>
}

/** Thrown by routes and plugins; plugins/problems.ts answers it as RFC 9457 problem details. */
export class ProblemError extends Error {
  readonly kind: ProblemKind
  readonly more: ProblemMore
  /** Read by Fastify. */
  readonly statusCode: number

  constructor(kind: ProblemKind, detail: string, more: ProblemMore = {}) {
    super(detail)
    this.name = 'ProblemError'
    this.kind = kind
    this.more = more
    this.statusCode = PROBLEMS[kind][0]
  }
}
