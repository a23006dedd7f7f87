/** Narrow no-break space: groups digits without letting a number break. */
export const THIN = '\u202F'
const MINUS = '\u2212'
const SUPERSCRIPT: Record<string, string> = { '-': '⁻', '0': '⁰', '1': '¹', '2': '²', '3': '³', '4': '⁴', '5': '⁵', '6': '⁶', '7': '⁷', '8': '⁸', '9': '⁹' }

const superscript = (n: number) => [...String(n)].map(c => SUPERSCRIPT[c]!).join('')

/** A whole number in groups of three: 10 000. */
export function formatCount(n: number): string {
  const digits = String(Math.abs(Math.round(n)))
  const grouped = digits.length > 4 ? digits.replace(/\B(?=(\d{3})+$)/g, THIN) : digits
  return n < 0 ? MINUS + grouped : grouped
}

/** With a power of ten: 1.33 × 10⁻³. */
export function formatPower(x: number, digits = 3): string {
  const [mantissa, exponent] = x.toExponential(digits - 1).split('e') as [string, string]
  return `${mantissa.replace('-', MINUS)} × 10${superscript(Number(exponent))}`
}

/** `digits` significant figures; powers of ten below 1e-3 and from 1e6 on: 1.33 × 10⁻³. */
export function formatNumber(x: number, digits = 4): string {
  if (x === 0) return '0'
  if (!Number.isFinite(x)) return x > 0 ? '∞' : Number.isNaN(x) ? 'not a number' : `${MINUS}∞`
  const magnitude = Math.abs(x)
  if (magnitude < 1e-3 || magnitude >= 1e6) return formatPower(x, digits)
  const fixed = Number(x.toPrecision(digits))
  const places = Math.max(0, digits - 1 - Math.floor(Math.log10(Math.abs(fixed))))
  const [whole, fraction] = Math.abs(fixed).toFixed(Math.min(places, 20)).split('.') as [string, string | undefined]
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, THIN) : whole
  return (x < 0 ? MINUS : '') + (fraction === undefined ? grouped : `${grouped}.${fraction}`)
}

/** Value with the standard error of its last two digits in brackets: 2.314(41). */
export function formatUncertain(value: number, standardError: number): string {
  if (!(standardError > 0) || !Number.isFinite(value)) return formatNumber(value)
  const places = Math.max(0, 1 - Math.floor(Math.log10(standardError)))
  if (Math.abs(value) < 1e-3 && value !== 0) {
    const exponent = Math.floor(Math.log10(Math.abs(value)))
    return `${formatUncertain(value / 10 ** exponent, standardError / 10 ** exponent)} × 10${superscript(exponent)}`
  }
  const figure = Math.abs(value).toFixed(Math.min(places, 20))
  return `${value < 0 ? MINUS : ''}${figure}(${Math.round(standardError * 10 ** places)})`
}

/** A share in words that keep small and large ones apart: "12.3 %", "1.33 × 10⁻³", "99.97 %". */
export function formatShare(p: number, digits = 3): string {
  if (p === 0) return '0'
  if (p < 0.01) return formatPower(p, digits)
  const percent = p * 100
  const places = p > 0.9 && p < 1 ? Math.max(1, Math.floor(-Math.log10(1 - p) - 1e-9) - 1) : Math.max(0, digits - 1 - Math.floor(Math.log10(percent)))
  return `${percent.toFixed(Math.min(places, 6))}${THIN}%`
}

/** CPU or wall time in its two largest units: "13 h 11 m", "41 s", "0.4 s". */
export function formatDuration(seconds: number): string {
  if (!(seconds > 0)) return `0${THIN}s`
  if (seconds < 9.95) return `${seconds < 0.1 ? seconds.toPrecision(1) : seconds.toFixed(1)}${THIN}s`
  const whole = Math.round(seconds)
  if (whole < 60) return `${whole}${THIN}s`
  const minutes = Math.floor(whole / 60)
  if (minutes < 60) return whole % 60 === 0 ? `${minutes}${THIN}m` : `${minutes}${THIN}m ${whole % 60}${THIN}s`
  const hours = Math.floor(minutes / 60)
  if (hours >= 48) return `${formatCount(Math.floor(hours / 24))}${THIN}d ${hours % 24}${THIN}h`
  return minutes % 60 === 0 ? `${hours}${THIN}h` : `${hours}${THIN}h ${minutes % 60}${THIN}m`
}
