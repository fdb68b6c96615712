import type { Role } from '#shared/schemas/common'

export const ROLES: readonly { value: Role, label: string }[] = [
  { value: 'owner', label: 'owner' },
  { value: 'maker', label: 'maker' },
  { value: 'staff', label: 'staff' },
  { value: 'customer', label: 'customer' },
]

/** What each role may do, for whoever gives it. */
export const ROLE_WORDS: Record<Role, string> = {
  owner: 'Everything, with people, prices and settings.',
  maker: 'The bench: instruments, recordings, readings, turn sheets, making of ordered heads.',
  staff: 'The shop: histories, customers, orders, refunds, stock.',
  customer: 'Own instruments, their histories, and own orders.',
}
