import { RateLimiterMemory, RateLimiterRes } from 'rate-limiter-flexible'
import { DomainError } from '../core/errors'

/* Only failures count: ten a quarter of an hour for one address from one place, fifty from one place in all. */
const perAddress = new RateLimiterMemory({ keyPrefix: 'address', points: 10, duration: 900 })
const perPlace = new RateLimiterMemory({ keyPrefix: 'place', points: 50, duration: 900 })

const refuse = () => new DomainError('too-many-tries', 'Too many wrong tries. Wait a quarter of an hour, or ask for a new password.')

export const attemptLimiter = {
  async refuseIfSpent(email: string, ip: string): Promise<void> {
    const [address, place] = await Promise.all([perAddress.get(`${email} ${ip}`), perPlace.get(ip)])
    if ((address && address.remainingPoints <= 0) || (place && place.remainingPoints <= 0)) throw refuse()
  },
  async countFailure(email: string, ip: string): Promise<void> {
    await Promise.all([perAddress.consume(`${email} ${ip}`), perPlace.consume(ip)]).catch((reason) => {
      if (reason instanceof RateLimiterRes) throw refuse()
      throw reason
    })
  },
  async clear(email: string, ip: string): Promise<void> {
    await perAddress.delete(`${email} ${ip}`)
  },
}
