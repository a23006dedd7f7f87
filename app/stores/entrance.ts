import { z } from 'zod'
import {
  invitationAcceptSchema, invitationSeenSchema, resetConfirmSchema, resetRequestedSchema, resetRequestSchema, type InvitationSeen,
} from '#shared/schemas/accounts'

/**
 * The ways in besides signing in: invitations and forgotten passwords. Everything here throws a ZodError before anything is
 * sent, or a ProblemError with the pointers of the fields.
 */
export const useEntranceStore = defineStore('entrance', () => {
  const api = useApi()
  const session = useSessionStore()

  /** What an invitation is for. */
  const look = (token: string): Promise<InvitationSeen> =>
    api.json('/api/invitations/look', invitationSeenSchema, { method: 'POST', body: { token } })

  /** Joins the team; the reader is signed in as the new person then. */
  async function join(token: string, name: string, password: string) {
    await api.json('/api/invitations/accept', z.unknown(), { method: 'POST', body: invitationAcceptSchema.parse({ token, name, password }) })
    await session.load()
  }

  /** Asks for a link by mail. Answers for how many minutes it holds, the same whether the address is known or not. */
  async function askReset(email: string): Promise<number> {
    return (await api.json('/api/password-resets', resetRequestedSchema, { method: 'POST', body: resetRequestSchema.parse({ email }) })).validMinutes
  }

  /** Sets a new password and ends every session of that person. */
  async function reset(token: string, password: string) {
    await api.json('/api/password-resets/confirm', z.unknown(), { method: 'POST', body: resetConfirmSchema.parse({ token, password }) })
    if (session.me) await session.load()
  }

  return { look, join, askReset, reset }
})
