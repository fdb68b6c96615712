import type { Role } from '../people.table'

/** Invented people of an invented workshop; `.test` addresses reach nobody (RFC 2606). */
export interface DemoPerson { key: string, name: string, email: string, role: Role }

export const DEMO_PASSWORD = 'drumhead-demo'

export const demoPeople: DemoPerson[] = [
  { key: 'owner', name: 'Edda Vane', email: 'owner@rimwright.test', role: 'owner' },
  { key: 'maker', name: 'Maren Aldous', email: 'maker@rimwright.test', role: 'maker' },
  { key: 'maker2', name: 'Corin Hale', email: 'corin@rimwright.test', role: 'maker' },
  { key: 'staff', name: 'Jonas Pell', email: 'staff@rimwright.test', role: 'staff' },
  { key: 'player', name: 'Ilse Brandt', email: 'player@rimwright.test', role: 'customer' },
  { key: 'orchestra', name: 'Lowen Valley Orchestra', email: 'percussion@lowen-orchestra.test', role: 'customer' },
  { key: 'school', name: 'Millbeck Music School', email: 'office@millbeck-music.test', role: 'customer' },
  { key: 'studio', name: 'Room Nine Studio', email: 'desk@room-nine.test', role: 'customer' },
  { key: 'petra', name: 'Petra Oduya', email: 'petra.oduya@post.test', role: 'customer' },
  { key: 'sander', name: 'Sander Quist', email: 'sander@quist.test', role: 'customer' },
  { key: 'noor', name: 'Noor Haddad', email: 'noor.haddad@post.test', role: 'customer' },
  { key: 'band', name: 'Underfell Brass and Drum Band', email: 'stores@underfell-band.test', role: 'customer' },
  { key: 'tomas', name: 'Tomas Reik', email: 'tomas@reik.test', role: 'customer' },
]
