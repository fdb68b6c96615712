import type { InjectionKey, Ref } from 'vue'
import type { ModeView } from '~/utils/readingParts'

export interface ModeFocus {
  /** Key of the mode that is pointed at, focused or pinned; null for the whole tap. */
  active: Readonly<Ref<string | null>>
  pinned: Readonly<Ref<string | null>>
  point: (key: string | null) => void
  /** Keeps a mode lit after the pointer leaves; a second time lets it go. */
  pin: (key: string) => void
}

const KEY: InjectionKey<ModeFocus> = Symbol('mode focus')

/** Tells lines of a reading apart, the two heads of a drum included. */
export function modeKey(mode: Pick<ModeView, 'm' | 'n' | 'head'>): string {
  return `${mode.m},${mode.n}${mode.head ? ' other' : ''}`
}

/** The plate's one shared pointer: figures and table light the same mode. */
export function provideModeFocus(): ModeFocus {
  const pointed = ref<string | null>(null)
  const pinned = ref<string | null>(null)
  const focus: ModeFocus = {
    active: computed(() => pointed.value ?? pinned.value),
    pinned,
    point: (key) => { pointed.value = key },
    pin: (key) => { pinned.value = pinned.value === key ? null : key },
  }
  provide(KEY, focus)
  return focus
}

export function useModeFocus(): ModeFocus {
  const focus = inject(KEY)
  if (!focus) throw new Error('useModeFocus needs provideModeFocus above it')
  return focus
}
