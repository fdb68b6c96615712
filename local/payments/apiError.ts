import type { z } from 'zod'

/** Error as the API answers it: `{ error: { type, code, param, message } }`. Source: docs.stripe.com/api/errors. */
export class ApiError extends Error {
  constructor(
    readonly status: number,
    readonly body: { type: 'invalid_request_error' | 'idempotency_error' | 'api_error', code?: string, param?: string, message: string },
  ) {
    super(body.message)
  }
}

export function invalidRequest(message: string, details: { code?: string, param?: string } = {}): ApiError {
  return new ApiError(400, { type: 'invalid_request_error', ...details, message })
}

/** 404 as the API gives it for an unknown id. */
export function noSuch(what: string, id: string, param: string): ApiError {
  return new ApiError(404, { type: 'invalid_request_error', code: 'resource_missing', param, message: `No such ${what}: '${id}'` })
}

/** The API reports the first fault only, with the parameter's name in form notation. */
export function fromZod(error: z.ZodError): ApiError {
  const issue = error.issues[0]!
  if (issue.code === 'unrecognized_keys') {
    const param = formName([...issue.path, issue.keys[0]!])
    return invalidRequest(`Received unknown parameter: ${param}`, { code: 'parameter_unknown', param })
  }
  const param = formName(issue.path)
  if (issue.code === 'invalid_type' && issue.input === undefined) {
    return invalidRequest(`Missing required param: ${param}.`, { code: 'parameter_missing', param })
  }
  const code = issue.code === 'custom' ? undefined : issue.code === 'invalid_type' && issue.expected === 'number' ? 'parameter_invalid_integer' : undefined
  return invalidRequest(`${param}: ${issue.message}`, { code, param })
}

function formName(path: PropertyKey[]): string {
  return path.map((part, index) => index === 0 ? String(part) : `[${String(part)}]`).join('')
}
