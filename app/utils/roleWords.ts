import type { Role } from '#shared/schemas/api'

/** What each role may do, as it is told to the one who gives it and to the one who gets it. */
export const ROLE_MEANINGS: Record<Role, string> = {
  researcher: 'asks, cancels and deletes own jobs, saves presets, reads and exports everything of the team',
  student: 'reads, replays and exports the team’s answers, and tries anything on the bench; queues and changes nothing',
  admin: 'does what a researcher does; also invites people, sets roles and quotas, and ends anyone’s jobs',
}

/** What follows for a person from another role. */
export function roleChangeWords(name: string, from: Role, to: Role): string {
  if (to === 'admin') return `${name} may then change the role and quota of everybody, yours too.`
  if (to === 'student') return `${name} can queue, save and change nothing from the next request on. Jobs that wait or run go on.`
  return from === 'admin'
    ? `${name} loses the pages for admins with the next request, and keeps all else.`
    : `${name} may queue jobs from the next request on, within the quota.`
}
