/** The form in which an officer lets a heating go on. */
import { z } from 'zod'

export const TolerateSchema = z.object({
  eventId: z.coerce.number({ error: 'Choose the danger.' }).int().positive('Choose the danger.'),
  reason: z
    .string()
    .trim()
    .min(10, 'Say in a sentence why it goes on, and who watches it until when.')
    .max(1000, 'At most 1000 characters.'),
  password: z.string().min(1, 'Sign with your own password.'),
})
