/** What middleware has found out about a request, for the loaders and actions after it. Keys and types only. */
import { createContext } from 'react-router'
import type { Actor } from './domain/actor.ts'

/** The signed-in person, or null. */
export const actorContext = createContext<Actor | null>(null)

/** The product's time for this request: one instant, however long the request takes. */
export const nowContext = createContext<Date>()

/** Nonce of this response's content security policy. */
export const nonceContext = createContext<string>()

/** The signed-in person's own settings. */
export interface Preferences {
  pressureUnit: PressureUnit
  theme: 'system' | 'light' | 'dark'
}
export type PressureUnit = 'Pa' | 'mbar' | 'Torr'
export const preferencesContext = createContext<Preferences>({ pressureUnit: 'Pa', theme: 'system' })
