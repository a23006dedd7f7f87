/** Characters with which spreadsheet programs begin a formula. */
const FORMULA_START = /^[=+\-@\t\r]/

/** One cell after RFC 4180. Numbers stay numbers; text that a spreadsheet would run as a formula gets a leading apostrophe. */
export function csvCell(value: number | string | null): string {
  if (value === null) return ''
  if (typeof value === 'number') return Number.isFinite(value) ? String(value) : ''
  const inert = FORMULA_START.test(value) ? `'${value}` : value
  return /[",\r\n]/.test(inert) ? `"${inert.replace(/"/g, '""')}"` : inert
}

/** One record after RFC 4180, with its line end. */
export const csvRecord = (cells: readonly (number | string | null)[]): string => `${cells.map(csvCell).join(',')}\r\n`

const BLOCK = 64 * 1024

/** A header and rows as CSV text in blocks of about 64 KiB, so that long tables stream. */
export async function* csvBlocks(
  header: readonly string[], rows: Iterable<readonly (number | string | null)[]> | AsyncIterable<readonly (number | string | null)[]>,
): AsyncGenerator<string> {
  let block = csvRecord(header)
  for await (const row of rows) {
    block += csvRecord(row)
    if (block.length < BLOCK) continue
    yield block
    block = ''
  }
  yield block
}
