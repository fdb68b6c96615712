import type { ColumnType, Generated, Insertable, Selectable } from 'kysely'

export type Role = 'owner' | 'maker' | 'staff' | 'customer'

type CreatedAt = ColumnType<Date, Date | undefined, never>

export interface UsersTable {
  id: Generated<string>
  /** Stored in lower case; unique. */
  email: string
  name: string
  role: Role
  /** Null until an invited person has chosen a password. */
  password_hash: string | null
  email_confirmed_at: Date | null
  deactivated_at: Date | null
  created_at: CreatedAt
}
export type UserRow = Selectable<UsersTable>
export type NewUser = Insertable<UsersTable>

export interface SessionsTable {
  id: Generated<string>
  user_id: string
  user_agent: string | null
  created_at: CreatedAt
  last_seen_at: Generated<Date>
  revoked_at: Date | null
}

export type UserTokenKind = 'confirm-email' | 'reset-password' | 'invitation'

export interface UserTokensTable {
  id: Generated<string>
  user_id: string
  kind: UserTokenKind
  /** SHA-256 of the token, hex; the token itself stands only in the mail. */
  token_hash: string
  expires_at: Date
  used_at: Date | null
  created_at: CreatedAt
}

export interface AuditEventsTable {
  id: Generated<string>
  at: CreatedAt
  actor_id: string | null
  action: string
  subject_type: string
  subject_id: string | null
  detail: ColumnType<Record<string, unknown>, string, never>
}

export interface SettingsTable {
  key: string
  value: ColumnType<unknown, string, string>
}
