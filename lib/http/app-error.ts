interface ErrorKind {
  status: number
  title: string
  /** Whether the same request may work later without a change. */
  retry: boolean
}

/** Every error that leaves the server, by code. Details are sentences for a person and say what to do next. */
export const ERRORS = {
  'malformed-json': { status: 400, title: 'The body is not JSON', retry: false },
  'invalid-input': { status: 400, title: 'Some values cannot be used', retry: false },
  'too-large': { status: 413, title: 'The body is too large', retry: false },
  'wrong-media-type': { status: 415, title: 'The body must be JSON', retry: false },
  'wrong-encoding': { status: 415, title: 'The body is packed in a way that is not read here', retry: false },
  'malformed-gzip': { status: 400, title: 'The body is not gzip', retry: false },
  'not-signed-in': { status: 401, title: 'Not signed in', retry: false },
  'bad-credentials': { status: 401, title: 'E-mail address or password is wrong', retry: false },
  'bad-token': { status: 401, title: 'The token is not valid', retry: false },
  'bad-signature': { status: 401, title: 'The signature does not match', retry: false },
  'clock-skew': { status: 401, title: 'The clocks differ too much', retry: true },
  'session-expired': { status: 401, title: 'The session has ended', retry: false },
  'too-old': { status: 401, title: 'The report is too old', retry: false },
  'proof-used': { status: 401, title: 'The proof was used already', retry: false },
  'unknown-agent': { status: 401, title: 'The agent is not known', retry: false },
  'agent-ended': { status: 403, title: 'The agent has left or was revoked', retry: false },
  'wrong-origin': { status: 403, title: 'The request comes from another site', retry: false },
  forbidden: { status: 403, title: 'Not allowed', retry: false },
  'token-refused': { status: 403, title: 'Not allowed with this token', retry: false },
  'code-refused': { status: 403, title: 'The joining code cannot be used', retry: false },
  'invitation-refused': { status: 403, title: 'The invitation cannot be used', retry: false },
  'not-found': { status: 404, title: 'Not found', retry: false },
  'slug-taken': { status: 409, title: 'The short name is taken', retry: false },
  'already-partner': { status: 409, title: 'The team takes part already', retry: false },
  'already-member': { status: 409, title: 'Already in the team', retry: false },
  'last-owner': { status: 409, title: 'The team needs an owner', retry: false },
  'not-first-run': { status: 409, title: 'The server is already set up', retry: false },
  'in-use': { status: 409, title: 'Something else uses it', retry: false },
  'name-taken': { status: 409, title: 'The name is taken', retry: false },
  'cloned-key': { status: 409, title: 'The key is in use by another program', retry: false },
  'rotation-running': { status: 409, title: 'A new signing key is on its way', retry: true },
  'wrong-state': { status: 409, title: 'The node is not in a state for this', retry: false },
  'not-failed': { status: 409, title: 'The message cannot be sent now', retry: false },
  'incident-state': { status: 409, title: 'The incident is not in a state for this', retry: false },
  'rehearsal-over': { status: 409, title: 'The rehearsal is over', retry: false },
  'rehearsals-full': { status: 409, title: 'Too many rehearsals are waiting', retry: true },
  'wrong-file': { status: 415, title: 'The file is of a kind that is not kept', retry: false },
  'has-password': { status: 409, title: 'The person has a password', retry: false },
  'other-team': { status: 409, title: 'Another team gives the link', retry: false },
  'link-spent': { status: 410, title: 'The link no longer works', retry: false },
  'falling-counters': { status: 422, title: 'Counters have fallen', retry: false },
  throttled: { status: 429, title: 'Too many attempts', retry: true },
  internal: { status: 500, title: 'Something went wrong on the server', retry: true },
  unavailable: { status: 503, title: 'Not available at the moment', retry: true },
} as const satisfies Record<string, ErrorKind>

export type ErrorCode = keyof typeof ERRORS

export interface FieldError {
  path: string
  message: string
}

export interface ErrorData {
  errors?: FieldError[]
  /** Also sent as the Retry-After header. */
  retryAfterSeconds?: number
  /** Further members of the problem, such as serverTime. */
  members?: Record<string, string | number>
}

/** An error that a user may see. Everything else is logged and shown as `internal`. */
export class AppError extends Error {
  constructor(
    readonly code: ErrorCode,
    /** What happened and what to do next. */
    readonly detail: string,
    readonly data: ErrorData = {},
  ) {
    super(`${code}: ${detail}`)
    this.name = 'AppError'
  }
}
