import type { Settings } from '#shared/schemas/settings'
import { HttpProblem } from './problems'

/** @throws HttpProblem conflict where no mail server is set, so that nobody waits for a mail that cannot come */
export function requireMail(settings: Pick<Settings, 'mail'>): void {
  if (!settings.mail) throw new HttpProblem('conflict', { detail: 'This installation sends no mail. Whoever runs it adds people and sets new passwords with: npm run person' })
}
