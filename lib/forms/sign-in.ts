import { z } from 'zod'

/** The sign-in form: e-mail in lower case, password as typed. */
export const signInSchema = z.object({
  email: z
    .string()
    .trim()
    .toLowerCase()
    .min(1, 'Write your e-mail address.')
    .max(254, 'An e-mail address has at most 254 signs.')
    .regex(/^[^\s@]+@[^\s@]+$/, 'This is not an e-mail address; it looks like name@place.example.'),
  password: z.string().min(1, 'Write your password.').max(512, 'A password has at most 512 signs here.'),
  next: z.string().max(2000).optional(),
})

export type SignInInput = z.output<typeof signInSchema>
