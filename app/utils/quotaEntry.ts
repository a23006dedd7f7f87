import { formatCount, formatNumber, THIN } from '#shared/utils/format'
import { toUnit } from '#shared/utils/quantity'

export const CPU_UNITS = [
  { id: 'h', label: 'hours' },
  { id: 'min', label: 'minutes' },
  { id: 's', label: 'seconds' },
] as const
export type CpuUnit = typeof CPU_UNITS[number]['id']

/** A quota as somebody would type it: the largest unit in which it is a short number. */
export function quotaEntry(cpuSeconds: number): { text: string, unit: CpuUnit } {
  const unit = CPU_UNITS.find(({ id }) => {
    const value = toUnit(cpuSeconds, 'cpu', id)
    return value === 0 || (value >= 1 && Number.isInteger(value * 100))
  })?.id ?? 's'
  return { text: String(toUnit(cpuSeconds, 'cpu', unit)), unit }
}

/** CPU time in the unit that the ledger counts in: "72 000 CPU-seconds". */
export const cpuSecondsWords = (seconds: number): string =>
  `${Number.isInteger(seconds) ? formatCount(seconds) : formatNumber(seconds, 6)} CPU-seconds`

/** Thousandths of a second, the accuracy that a ledger is shown with: "12.300 s". */
const thousandths = (seconds: number): number => Math.round(seconds * 1000)

/** A count of thousandths as seconds, without zeros that say nothing: "12.3 s". */
function secondsOf(milli: number): string {
  const places = milli % 1000 === 0 ? 0 : milli % 100 === 0 ? 1 : milli % 10 === 0 ? 2 : 3
  const [whole, fraction] = (Math.abs(milli) / 1000).toFixed(places).split('.') as [string, string | undefined]
  return `${formatCount(Number(whole))}${fraction === undefined ? '' : `.${fraction}`}${THIN}s`
}

/** CPU time of one entry with its sign: "+4.25 s", "−4.25 s". */
export function signedSeconds(seconds: number): string {
  const milli = thousandths(seconds)
  return milli === 0 ? secondsOf(0) : `${milli < 0 ? '\u2212' : '+'}${secondsOf(milli)}`
}

export interface AccountWords { charged: string, reserved: string, sum: string, limit: string, left: string }

/** The figures of an account, rounded so that charged and reserved as they are shown add up to the sum as it is shown. */
export function accountWords({ charged, reserved, limit }: { charged: number, reserved: number, limit: number }): AccountWords {
  const [used, held, most] = [thousandths(charged), thousandths(reserved), thousandths(limit)] as const
  return {
    charged: secondsOf(used), reserved: secondsOf(held), sum: secondsOf(used + held), limit: secondsOf(most), left: secondsOf(Math.max(0, most - used - held)),
  }
}
