import type { Person } from '#shared/schemas/accounts'
import { formatDuration } from '#shared/utils/format'

const many = (n: number, one: string, more = `${one}s`) => `${n} ${n === 1 ? one : more}`

/** What a person has in the queue now: "2 chunks run, 3 jobs wait", "nothing". */
export function nowWords({ runningChunks, waitingJobs }: Pick<Person, 'runningChunks' | 'waitingJobs'>): string {
  const parts = [
    ...(runningChunks > 0 ? [`${many(runningChunks, 'chunk')} ${runningChunks === 1 ? 'runs' : 'run'}`] : []),
    ...(waitingJobs > 0 ? [`${many(waitingJobs, 'job')} ${waitingJobs === 1 ? 'waits' : 'wait'}`] : []),
  ]
  return parts.length > 0 ? parts.join(', ') : 'nothing'
}

/** How many people a team has: "4 people, 1 of them disabled". */
export function countWords(people: readonly Pick<Person, 'state'>[]): string {
  const disabled = people.filter(({ state }) => state === 'disabled').length
  return `${many(people.length, 'person', 'people')}${disabled > 0 ? `, ${disabled} of them disabled` : ''}`
}

/** A quota in words; students have none. */
export const quotaWords = (limit: number): string => limit > 0 ? formatDuration(limit) : 'none'

/** The sum of an account in a short line: "1.2 h used, 3 m reserved". */
export const usedWords = ({ charged, reserved }: { charged: number, reserved: number }): string =>
  `${charged > 0 ? formatDuration(charged) : 'nothing'} used${reserved > 0 ? `, ${formatDuration(reserved)} reserved` : ''}`

const SYSTEMS: readonly [RegExp, string][] = [[/iPhone/, 'iPhone'], [/iPad/, 'iPad'], [/Android/, 'Android'], [/Windows/, 'Windows'], [/Mac OS X|Macintosh/, 'macOS'], [/CrOS/, 'ChromeOS'], [/Linux|X11/, 'Linux']]
const BROWSERS: readonly [RegExp, string][] = [[/Edg\//, 'Edge'], [/OPR\//, 'Opera'], [/Firefox\//, 'Firefox'], [/Chrom(e|ium)\//, 'Chromium or Chrome'], [/Safari\//, 'Safari']]
const nameIn = (names: readonly [RegExp, string][], agent: string) => names.find(([sign]) => sign.test(agent))?.[1]

/** The browser and system that a session was opened with, as far as they say so themselves. */
export function agentWords(agent: string): string {
  const [browser, system] = [nameIn(BROWSERS, agent), nameIn(SYSTEMS, agent)]
  if (browser && system) return `${browser} on ${system}`
  return browser ?? system ?? (agent.trim() === '' ? 'A program that gave no name' : agent.slice(0, 60))
}
