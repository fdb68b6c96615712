import { RateLimiterMemory, RateLimiterRes } from 'rate-limiter-flexible'
import { DomainError } from '../core/errors'

/*
 * Security model: guessing is slowed where it comes from, never by locking an account, so nobody can be shut out by others.
 * A try is counted before the password is looked at (a hundred at once do not slip through) and given back when it was right.
 */
const QUARTER_HOUR_S = 900

/** Ten wrong tries for one address from one place; fifty from one place in all. */
const wrongForAddress = new RateLimiterMemory({ keyPrefix: 'address', points: 10, duration: QUARTER_HOUR_S })
const wrongFromPlace = new RateLimiterMemory({ keyPrefix: 'place', points: 50, duration: QUARTER_HOUR_S })

export interface Attempt { right: () => Promise<void> }

/** @throws DomainError too-many-tries */
export async function beginAttempt(email: string, ip: string): Promise<Attempt> {
  const address = `${email} ${ip}`
  try {
    await Promise.all([wrongForAddress.consume(address), wrongFromPlace.consume(ip)])
  } catch (reason) {
    throw spent(reason, 'Too many wrong tries. Wait a quarter of an hour, or ask for a new password.')
  }
  return {
    async right() {
      await Promise.all([wrongForAddress.delete(address), wrongFromPlace.reward(ip)])
    },
  }
}

/** Letters that a stranger can have sent: five to one address, whoever asks, and sixty from one place. */
const lettersToAddress = new RateLimiterMemory({ keyPrefix: 'letter-address', points: 5, duration: QUARTER_HOUR_S })
const lettersFromPlace = new RateLimiterMemory({ keyPrefix: 'letter-place', points: 60, duration: QUARTER_HOUR_S })

/**
 * Whether a letter may still go to this address; the caller answers the same either way.
 * @throws DomainError too-many-tries when this place has asked for too many
 */
export async function mayWriteTo(email: string, ip: string): Promise<boolean> {
  try {
    await lettersFromPlace.consume(ip)
  } catch (reason) {
    throw spent(reason, 'Too many requests from here. Wait a quarter of an hour.')
  }
  return lettersToAddress.consume(email).then(() => true, (reason) => {
    if (reason instanceof RateLimiterRes) return false
    throw reason
  })
}

function spent(reason: unknown, message: string): unknown {
  return reason instanceof RateLimiterRes ? new DomainError('too-many-tries', message) : reason
}
