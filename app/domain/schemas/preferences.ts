import { z } from 'zod'
import { safePath } from '../safe-path.ts'

export const PreferencesSchema = z.object({
  pressureUnit: z.enum(['Pa', 'mbar', 'Torr'], { error: 'Choose Pa, mbar or Torr.' }).optional(),
  theme: z.enum(['system', 'light', 'dark'], { error: 'Choose system, light or dark.' }).optional(),
  /** Page to go back to. */
  from: z
    .string()
    .default('/account')
    .transform((path) => safePath(path)),
})
