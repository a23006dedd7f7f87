import type { Invitation } from '#shared/schemas/accounts'
import type { Invitation as InvitationRow } from '../models/accounts'
import type { Database } from '../models/database'
import { namesOf } from './people'

/** Invitations as an admin sees them, in the order given; never their tokens. */
export async function presentInvitations(db: Database, rows: readonly InvitationRow[]): Promise<Invitation[]> {
  const named = await namesOf(db, rows.map(row => row.invitedById))
  return rows.map(({ id, email, role, invitedById, createdAt, expiresAt }) => ({
    id, email, role, invitedBy: named(invitedById), createdAt: createdAt.toISOString(), expiresAt: expiresAt.toISOString(),
  }))
}
