import type { Role } from '#shared/schemas/common'

declare module '#app' {
  interface PageMeta {
    /** Who may open the page; public when absent. */
    access?: 'signed-in' | Role[]
  }
}

export {}
