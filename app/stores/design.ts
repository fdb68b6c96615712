import { defineStore } from 'pinia'
import type { ShippingAddress } from '#shared/schemas/order'

export type TargetUnit = 'note' | 'hz' | 'tension'

/** What a person has entered of a head; text as typed where a field is typed. */
export interface DesignEntry {
  /** Null = a bare diameter. */
  instrumentId: string | null
  diameterMm: number | null
  filmId: string
  unit: TargetUnit
  noteName: string
  hz: string
  nPerM: string
  message: string
}

export type AddressEntry = Record<Exclude<keyof ShippingAddress, 'line2'>, string> & { line2: string }

const KEY = 'rimwright-design'

/** A 13.75 in head at D3 of a 10 mil film: a common floor tom, so that the page starts with a head that can be made. */
function startEntry(): DesignEntry {
  return { instrumentId: null, diameterMm: 349.25, filmId: 'pet-250', unit: 'note', noteName: 'D3', hz: '146.8', nPerM: '3000', message: '' }
}

function startAddress(): AddressEntry {
  return { name: '', line1: '', line2: '', city: '', postalCode: '', country: 'DE' }
}

/**
 * The head being designed. Kept in this tab's session storage, so that signing in or a look at another page loses
 * nothing; gone with the tab, as it holds an address.
 */
export const useDesign = defineStore('design', () => {
  const entry = ref<DesignEntry>(startEntry())
  const address = ref<AddressEntry>(startAddress())
  /** The order form is open: an address is asked for. */
  const ordering = ref(false)
  const restored = ref(false)

  /** Takes up what this tab had; called once the page is in the browser, so that server and browser first draw the same. */
  function restore(): void {
    if (restored.value || import.meta.server) return
    restored.value = true
    try {
      const kept = JSON.parse(sessionStorage.getItem(KEY) ?? '{}') as { entry?: Partial<DesignEntry>, address?: Partial<AddressEntry>, ordering?: boolean }
      entry.value = { ...startEntry(), ...kept.entry }
      address.value = { ...startAddress(), ...kept.address }
      ordering.value = kept.ordering === true
    } catch {
      // Storage that is full, shut or garbled keeps nothing; the page works without.
    }
    watch([entry, address, ordering], keep, { deep: true })
  }

  function keep(): void {
    try {
      sessionStorage.setItem(KEY, JSON.stringify({ entry: entry.value, address: address.value, ordering: ordering.value }))
    } catch {
      // As above.
    }
  }

  /** After an order: the next head starts from this one, without its note and with the form closed. */
  function ordered(): void {
    ordering.value = false
    entry.value = { ...entry.value, message: '' }
  }

  return { entry, address, ordering, restore, ordered }
})
