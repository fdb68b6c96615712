import { defineStore } from 'pinia'

export type Theme = 'system' | 'light' | 'dark'
export type Units = 'trade' | 'si'

/** What a person chose for the look and the units; in a cookie, so that the server draws the page the same way. */
export const usePreferences = defineStore('preferences', () => {
  const options = { maxAge: 400 * 24 * 3600, sameSite: 'lax', path: '/' } as const
  const theme = useCookie<Theme>('rimwright-theme', { ...options, default: () => 'system' })
  /** Trade units are inches and mils, SI is mm and um. Tension is N/m in both. */
  const units = useCookie<Units>('rimwright-units', { ...options, default: () => 'trade' })
  return { theme, units }
})
