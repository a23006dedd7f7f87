import { readFileSync } from 'node:fs'

// Linux tells user processes CPU time in hundredths of a second, whatever the kernel's own tick is.
const MICROS_PER_TICK = 10_000
const PAGE_BYTES = 4096

/** What a process has used. */
export interface Usage {
  /** user and system time since it started, µs */
  cpuMicros: number
  /** resident memory, bytes */
  residentBytes: number
}

/** What the system's process table says of a process; null when it is gone or the system has no such table. */
export function usageOf(pid: number): Usage | null {
  try {
    const stat = readFileSync(`/proc/${pid}/stat`, 'utf8')
    // The name may hold spaces and brackets: the numbers start after its last bracket, with field 3.
    const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ')
    return { cpuMicros: (Number(fields[11]) + Number(fields[12])) * MICROS_PER_TICK, residentBytes: Number(fields[21]) * PAGE_BYTES }
  }
  catch {
    return null
  }
}
