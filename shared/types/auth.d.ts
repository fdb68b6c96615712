declare module '#auth-utils' {
  interface User {
    id: string
    name: string
    email: string
    role: 'owner' | 'maker' | 'staff' | 'customer'
  }
  interface UserSession {
    /** The browser brought a session that was ended from elsewhere. */
    ended?: boolean
  }
  interface SecureSessionData {
    /** Row in `sessions`; the cookie alone proves nothing. */
    sessionId: string
  }
}

export {}
