import type { Config } from 'tailwindcss'

const token = (name: string) => `var(--${name})`

export default {
  content: ['./app/**/*.{vue,ts}'],
  theme: {
    borderRadius: { none: '0', DEFAULT: '2px', sm: '2px' },
    boxShadow: { none: 'none' },
    extend: {
      colors: Object.fromEntries(
        ['film', 'sheet', 'ink', 'line', 'muted', 'lacquer', 'on-lacquer', 'brass', 'alarm', 'slack', 'tight'].map(name => [name, token(name)]),
      ),
      fontFamily: {
        head: ['Bricolage Grotesque', 'Instrument Sans', 'sans-serif'],
        sans: ['Instrument Sans', 'system-ui', 'sans-serif'],
        mono: ['Martian Mono', 'ui-monospace', 'monospace'],
      },
      screens: { 'xs': '420px', '3xl': '1800px' },
    },
  },
} satisfies Config
