/**
 * Errors that a caller may read. Services throw them; the one error handler turns them into problem
 * documents (RFC 9457). Anything else is a defect: it is logged whole and answered with a bare 500.
 */
export interface FieldError {
  /** Path in the request, for example `body.changes.0.endsAt`, or `line 12`. */
  path: string;
  message: string;
}

export class AppError extends Error {
  constructor(
    readonly status: number,
    /** Stable, machine-readable; the client may branch on it. */
    readonly code: string,
    /** A sentence that says what happened and how to go on. */
    message: string,
    readonly errors: FieldError[] = [],
    readonly headers: Record<string, string> = {},
  ) {
    super(message);
  }
}

export class InvalidRequest extends AppError {
  constructor(message: string, errors: FieldError[] = [], code = 'invalid') {
    super(400, code, message, errors);
  }
}

export class NotSignedIn extends AppError {
  constructor(message = 'Sign in first.', code = 'not-signed-in') {
    super(401, code, message);
  }
}

export class NotAllowed extends AppError {
  constructor(message = 'Your role at this station does not allow this.') {
    super(403, 'not-allowed', message);
  }
}

/** Also the answer to another station's ids: who is not a member learns nothing about what exists. */
export class NotFound extends AppError {
  constructor(what = 'This') {
    super(404, 'not-found', `${what} does not exist here.`);
  }
}

export class Conflict extends AppError {
  constructor(message: string, errors: FieldError[] = [], code = 'conflict') {
    super(409, code, message, errors);
  }
}

export class TooLarge extends AppError {
  constructor(message: string) {
    super(413, 'too-large', message);
  }
}

export class TooMany extends AppError {
  constructor(seconds: number) {
    super(429, 'too-many', `Too many tries. Wait ${seconds} seconds and try again.`, [], {
      'Retry-After': String(seconds),
    });
  }
}

export class Unavailable extends AppError {
  constructor(message = 'The database does not answer. Try again in a moment.') {
    super(503, 'unavailable', message, [], { 'Retry-After': '5' });
  }
}
