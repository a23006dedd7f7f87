import type { FigureTable } from './model'

const quote = (text: string) => /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text

/** RFC 4180 text of a figure's numbers, in full. */
export function tableCsv({ columns, rows }: FigureTable): string {
  const lines = [columns.map(quote), ...rows.map(row => row.map(value => value === null ? '' : String(value)))]
  return lines.map(cells => cells.join(',')).join('\r\n') + '\r\n'
}

/** A number as a table shows it: five figures, powers of ten written out where they are far from one. */
export function cellText(value: number | null): string {
  if (value === null) return '–'
  if (Number.isInteger(value) && Math.abs(value) < 1e6) return String(value).replace('-', '\u2212')
  const magnitude = Math.abs(value)
  return (magnitude >= 1e-4 && magnitude < 1e6 ? String(Number(value.toPrecision(5))) : value.toExponential(3)).replaceAll('-', '\u2212')
}
