import { z } from 'zod'

/** Accounts that the sign-in page of the demo shows; none anywhere else. */
export const demoAccountsSchema = z.array(z.strictObject({ email: z.string(), password: z.string(), role: z.string() }))
export type DemoAccount = z.infer<typeof demoAccountsSchema>[number]
