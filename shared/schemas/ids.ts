import { z } from 'zod'

export const idSchema = z.string().regex(/^[0-9A-Za-z]{12,32}$/)
/** A point in time as ISO 8601 in UTC. */
export const instantSchema = z.iso.datetime()
