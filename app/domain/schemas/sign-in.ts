import { z } from 'zod'

export const SignInSchema = z.object({
  email: z.string().trim().min(1, 'Enter your address.').max(254),
  password: z.string().min(1, 'Enter your password.').max(1000),
})
