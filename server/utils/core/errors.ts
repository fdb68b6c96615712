/** Everything a domain function may refuse with. `errorStatus` is the one place where codes become HTTP. */
export type DomainErrorCode
  = | 'bad-input' | 'wrong-credentials' | 'not-signed-in' | 'email-unconfirmed' | 'not-allowed' | 'not-found'
    | 'conflict' | 'move-not-allowed' | 'link-expired' | 'too-large' | 'wrong-media-type' | 'unreadable-recording'
    | 'too-many-tries' | 'bad-signature' | 'payment-service' | 'busy'

export interface FieldIssue { path: string, message: string }

/** A refusal in plain words that tell the person what to do; anything else thrown is a fault of ours. */
export class DomainError extends Error {
  constructor(readonly code: DomainErrorCode, message: string, readonly issues?: FieldIssue[]) {
    super(message)
    this.name = 'DomainError'
  }
}

export const errorStatus: Record<DomainErrorCode, [status: number, text: string]> = {
  'bad-input': [400, 'Bad Request'],
  'bad-signature': [400, 'Bad Request'],
  'wrong-credentials': [401, 'Unauthorized'],
  'not-signed-in': [401, 'Unauthorized'],
  'email-unconfirmed': [403, 'Forbidden'],
  'not-allowed': [403, 'Forbidden'],
  'not-found': [404, 'Not Found'],
  'conflict': [409, 'Conflict'],
  'move-not-allowed': [409, 'Conflict'],
  'link-expired': [410, 'Gone'],
  'too-large': [413, 'Content Too Large'],
  'wrong-media-type': [415, 'Unsupported Media Type'],
  'unreadable-recording': [422, 'Unprocessable Content'],
  'too-many-tries': [429, 'Too Many Requests'],
  'payment-service': [502, 'Bad Gateway'],
  'busy': [503, 'Service Unavailable'],
}

export const notFound = (what: string) => new DomainError('not-found', `${what} was not found. It may have been removed, or it belongs to someone else.`)
