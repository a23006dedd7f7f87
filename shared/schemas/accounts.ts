import { z } from 'zod'
import { PASSWORD_LENGTH, passwordFault } from '../utils/passwordRules'
import { emailSchema, idSchema, instantSchema, quotaSchema, roleSchema } from './api'

/** A person as others see it named. */
const namedSchema = z.strictObject({ id: idSchema, name: z.string() })

/** A person's name: one line, with something to read in it, and no signs that turn the direction of writing around. */
export const personNameSchema = z.string().trim().normalize('NFC')
  .min(1, { error: 'Enter a name.' })
  .max(120, { error: 'At most 120 characters.' })
  .regex(/^[^\p{Cc}\p{Cs}\p{Zl}\p{Zp}\u200E\u200F\u202A-\u202E\u2066-\u2069]*$/u, { error: 'A name is one line of letters, without control characters.' })
  .regex(/[\p{L}\p{N}]/u, { error: 'Enter a name with at least one letter.' })

/** A password that somebody chooses. The server also compares it with the owner's name and address. */
export const newPasswordSchema = z.string().normalize('NFC')
  .min(PASSWORD_LENGTH.least, { error: `At least ${PASSWORD_LENGTH.least} characters. A sentence is welcome, spaces too.` })
  .max(PASSWORD_LENGTH.most, { error: `At most ${PASSWORD_LENGTH.most} characters.` })
  .superRefine((password, context) => {
    const fault = passwordFault(password)
    if (fault) context.addIssue({ code: 'custom', message: fault })
  })

/** What the link of a mail carries. Anything may be sent: what is no token of ours is one that is not valid. */
const tokenSchema = z.string().min(1).max(200)

export const INVITATION_DAYS = 7
export const invitationSchema = z.strictObject({
  id: idSchema, email: z.string(), role: roleSchema, invitedBy: namedSchema, createdAt: instantSchema, expiresAt: instantSchema,
})
export type Invitation = z.infer<typeof invitationSchema>
export const invitationListSchema = z.strictObject({ invitations: z.array(invitationSchema) }).meta({ description: 'Those that can still be accepted, newest first.' })
export const invitationCreateSchema = z.strictObject({ email: emailSchema, role: roleSchema })
export const invitationLookSchema = z.strictObject({ token: tokenSchema })
export const invitationSeenSchema = z.strictObject({ email: z.string(), role: roleSchema, team: z.string() })
export type InvitationSeen = z.infer<typeof invitationSeenSchema>
export const invitationAcceptSchema = z.strictObject({ token: tokenSchema, name: personNameSchema, password: newPasswordSchema })

export const RESET_MINUTES = 60
export const resetRequestSchema = z.strictObject({ email: emailSchema })
/** The same whether or not the address has an account. */
export const resetRequestedSchema = z.strictObject({ validMinutes: z.int() })
export const resetConfirmSchema = z.strictObject({ token: tokenSchema, password: newPasswordSchema })

export const meEditSchema = z.strictObject({
  name: personNameSchema.optional(), notifyFinished: z.boolean().optional(), notifyFailed: z.boolean().optional(),
})
export type MeEdit = z.infer<typeof meEditSchema>
export const passwordChangeSchema = z.strictObject({
  current: z.string().normalize('NFC').min(1, { error: 'Enter your present password.' }).max(PASSWORD_LENGTH.most), password: newPasswordSchema,
})

export const sessionSchema = z.strictObject({
  id: idSchema, createdAt: instantSchema, lastSeenAt: instantSchema, expiresAt: instantSchema, userAgent: z.string(), current: z.boolean(),
})
export type OwnSession = z.infer<typeof sessionSchema>
export const sessionListSchema = z.strictObject({ sessions: z.array(sessionSchema) }).meta({ description: 'The reader’s own open sessions, last used first.' })

/** A person as the table of an admin shows it. */
export const personSchema = z.strictObject({
  id: idSchema,
  name: z.string(),
  email: z.string(),
  role: roleSchema,
  state: z.enum(['active', 'disabled']),
  quota: quotaSchema,
  usedCpuSeconds: z.number().meta({ description: 'Charged within the quota’s window.' }),
  runningChunks: z.int(),
  waitingJobs: z.int(),
  lastSeenAt: instantSchema.nullable(),
})
export type Person = z.infer<typeof personSchema>
export const personListSchema = z.strictObject({ people: z.array(personSchema) })

/** What an admin changes of a person; a new quota comes with its reason. */
export const personEditSchema = z.strictObject({
  quotaCpuSeconds: z.number().min(0, { error: 'A quota is not negative.' }).max(1e8, { error: 'At most 100,000,000 CPU-seconds.' }).optional(),
  reason: z.string().trim().min(1, { error: 'Say why the quota changes.' }).max(300, { error: 'At most 300 characters.' }).optional(),
  role: roleSchema.optional(),
  active: z.boolean().optional(),
}).superRefine((edit, context) => {
  if (edit.quotaCpuSeconds !== undefined && edit.reason === undefined) context.addIssue({ code: 'custom', path: ['reason'], message: 'Say why the quota changes.' })
  if (edit.quotaCpuSeconds === undefined && edit.reason !== undefined) context.addIssue({ code: 'custom', path: ['reason'], message: 'A reason belongs to a change of the quota.' })
  if (edit.quotaCpuSeconds === undefined && edit.role === undefined && edit.active === undefined && edit.reason === undefined) {
    context.addIssue({ code: 'custom', message: 'Name what to change: quota, role or active.' })
  }
})
export type PersonEdit = z.infer<typeof personEditSchema>

export const quotaChangeSchema = z.strictObject({
  at: instantSchema, by: namedSchema, fromCpuSeconds: z.number(), toCpuSeconds: z.number(), reason: z.string(),
})
export type QuotaChange = z.infer<typeof quotaChangeSchema>
export const quotaHistorySchema = z.strictObject({ entries: z.array(quotaChangeSchema) }).meta({ description: 'Newest first, the last 200.' })

/** Kinds of entries as the ledger keeps them, and the words for them. */
export const LEDGER_WORDS = { reserve: 'reserved', charge: 'charged', release: 'refunded' } as const
export const ledgerEntrySchema = z.strictObject({
  id: z.int(),
  at: instantSchema,
  kind: z.enum(['reserve', 'charge', 'release']),
  cpuSeconds: z.number().meta({ description: 'Signed: what is reserved or charged is positive, what is refunded of a reservation negative.' }),
  job: z.strictObject({ id: idSchema, sentence: z.string() }).nullable().meta({ description: 'null: deleted since.' }),
})
export type LedgerLine = z.infer<typeof ledgerEntrySchema>
export const ledgerQuerySchema = z.strictObject({
  cursor: z.string().regex(/^\d{1,13}\.\d{1,15}$/, { error: 'Use the cursor of the page before.' }).optional(),
  limit: z.string().regex(/^\d{1,3}$/).transform(Number).pipe(z.int().min(1).max(200)).optional(),
})
export const ledgerPageSchema = z.strictObject({
  entries: z.array(ledgerEntrySchema), next: z.string().nullable(), balance: quotaSchema,
}).meta({ description: 'The entries that count in the quota’s window, newest first. Over all pages they add up to what is charged and reserved.' })
export type LedgerPage = z.infer<typeof ledgerPageSchema>

const loadSchema = z.strictObject({ runningChunks: z.int(), waitingJobs: z.int(), waitingCpuSeconds: z.number() })
export const queueSchema = z.strictObject({
  users: z.array(z.strictObject({ person: namedSchema, ...loadSchema.shape })).meta({ description: 'People of the team with work in the queue, those with most running first.' }),
  elsewhere: loadSchema.meta({ description: 'What other teams of this installation have in the same queue.' }),
  slots: z.int(),
  workers: z.array(z.strictObject({ host: z.string(), slots: z.int(), busy: z.int(), heartbeatAt: instantSchema })),
})
export type QueueUse = z.infer<typeof queueSchema>

/** A mail that the catcher of a demo has kept. */
export const caughtMailSchema = z.strictObject({
  id: z.string(), at: instantSchema, from: z.string(), to: z.array(z.string()), subject: z.string(), text: z.string(), html: z.string(),
})
export type CaughtMail = z.infer<typeof caughtMailSchema>
export const caughtMailListSchema = z.strictObject({ mails: z.array(caughtMailSchema) }).meta({ description: 'Newest first, the last 100.' })
