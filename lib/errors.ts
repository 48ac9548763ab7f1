/** Every way in which Ebbmark says no, with its HTTP status and short title: the one table. */
export const PROBLEMS = {
  'bad-request': { status: 400, title: 'The request is not usable' },
  'not-signed-in': { status: 401, title: 'Sign in first' },
  'not-allowed': { status: 403, title: 'Your roles do not cover this' },
  'not-found': { status: 404, title: 'Not here, or not yours to see' },
  conflict: { status: 409, title: 'It has changed meanwhile' },
  'too-large': { status: 413, title: 'Too much in one request' },
  invalid: { status: 422, title: 'Some of it is not usable' },
  'too-many': { status: 429, title: 'Too many tries' },
  failed: { status: 500, title: 'Something went wrong on our side' },
  unavailable: { status: 503, title: 'Not available just now' },
} as const

export type ProblemKind = keyof typeof PROBLEMS

/** Messages per field of a form or a request; the empty name holds what concerns the whole. */
export type FieldProblems = Record<string, string[]>

/**
 * An answer that a person can act on: `detail` says what happened, what is safe and what to do. Thrown anywhere on the server;
 * the HTTP wrappers turn it into words or problem details. Its text is meant to be shown, so it holds nothing secret.
 */
export class Refusal extends Error {
  override readonly name = 'Refusal'
  readonly kind: ProblemKind
  readonly fields: FieldProblems | undefined
  readonly retryAfterSeconds: number | undefined

  constructor(
    kind: ProblemKind,
    detail: string,
    more: { fields?: FieldProblems; retryAfterSeconds?: number; cause?: unknown } = {},
  ) {
    super(detail, more.cause === undefined ? undefined : { cause: more.cause })
    this.kind = kind
    this.fields = more.fields
    this.retryAfterSeconds = more.retryAfterSeconds
  }

  get status(): number {
    return PROBLEMS[this.kind].status
  }

  get title(): string {
    return PROBLEMS[this.kind].title
  }
}
